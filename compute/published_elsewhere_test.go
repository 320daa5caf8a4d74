package compute_test

func init() {
	belongs("no section and law have that exponent", "varied-flow-0.70-3.4")
	belongs("no operation knows such weirs", "kc-table", "v-notch-90")
	belongs("another rule for the same linings than the one that is built in", "keown-nonscour", "nrcs-retardance", "hec15-vegetal")
	belongs("tabulated roughness; nothing computes it", "chow-table-5-6")
	belongs("a sentence of common practice without a number to compute", "fact-froude-band", "fact-steep-slope", "fact-freeboard-min", "fact-self-cleansing",
		"fact-max-velocity-concrete", "fact-reynolds-open", "fact-jump-classes", "fact-air-entrainment", "fact-pipe-part-full", "fact-wide-channel",
		"fact-alpha-range", "fact-sloping-jump", "fact-profile-end", "fact-profile-names")
}
