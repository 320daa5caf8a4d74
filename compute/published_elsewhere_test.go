package compute_test

func init() {
	belongs("no section and law have that exponent", "varied-flow-0.70-3.4")
	belongs("no operation knows such weirs", "kc-table", "v-notch-90")
	belongs("belongs to design rules", "fortier-scobey", "keown-nonscour", "chow-7-2-lane", "usbr-freeboard-us", "usbr-freeboard-si",
		"superelevation", "nrcs-retardance", "hec15-vegetal", "chow-table-5-6")
	belongs("a sentence of common practice without a number to compute", "fact-froude-band", "fact-steep-slope", "fact-freeboard-min", "fact-self-cleansing",
		"fact-max-velocity-concrete", "fact-reynolds-open", "fact-jump-classes", "fact-air-entrainment", "fact-pipe-part-full", "fact-wide-channel",
		"fact-alpha-range", "fact-sloping-jump", "fact-profile-end", "fact-profile-names")
}
