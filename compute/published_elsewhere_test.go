package compute_test

func init() {
	belongs("belongs to profiles", "cruise-15-1", "bresse-1.01", "bresse-1.02", "bresse-1.05", "bresse-1.10", "bresse-1.20", "bresse-1.30", "bresse-1.50",
		"bresse-2.00", "bresse-3.00", "bresse-5.00", "varied-flow-0.50-3.0", "varied-flow-0.90-3.0", "varied-flow-0.50-4.0", "varied-flow-0.50-5.0",
		"varied-flow-1.10-3.0", "varied-flow-1.50-3.0", "varied-flow-2.00-3.0", "varied-flow-1.50-4.0", "varied-flow-2.00-4.0", "varied-flow-0.70-3.4",
		"varied-flow-own", "macdonald-rect-subcritical", "macdonald-rect-jump", "macdonald-trap-periodic", "delestre2013-long-subcritical",
		"delestre2013-long-jump", "delestre2013-short-transition-jump", "fact-profile-end", "fact-profile-names")
	belongs("belongs to controls: weirs", "scw-us", "scw-si", "rehbock-kc", "kc-table", "v-notch-90")
	belongs("belongs to design rules", "fortier-scobey", "keown-nonscour", "chow-7-2-lane", "usbr-freeboard-us", "usbr-freeboard-si",
		"superelevation", "nrcs-retardance", "hec15-vegetal", "chow-table-5-6")
	belongs("a sentence of common practice without a number to compute", "fact-froude-band", "fact-steep-slope", "fact-freeboard-min", "fact-self-cleansing",
		"fact-max-velocity-concrete", "fact-reynolds-open", "fact-jump-classes", "fact-air-entrainment", "fact-pipe-part-full", "fact-wide-channel",
		"fact-alpha-range", "fact-sloping-jump")
}
