package demo

// AppraisalMistakes are the rows of the appraisals that are wrong on purpose, in the order of their lines: what people write into criteria, and what they must be told.
var AppraisalMistakes = []Mistake{
	{
		Line: 9, ID: `"OST-RD-0009"`, Status: 422, Pointers: []string{"/discharge", "/flows"},
		Told: "the row still has one discharge, as the depths wanted it, and no flows",
		Text: `{"id":"OST-RD-0009","section":{"kind":"trapezoidal","bottom_width":0.5,"side_slope":1.5,"bank_height":0.9},"roughness":{"manning":0.03},"bed_slope":0.003,"discharge":0.4,"criteria":{"least_freeboard":0.15}}`,
	},
	{
		Line: 58, ID: `"OST-SW-0058"`, Status: 422, Pointers: []string{"/criteria/greatest_fill"},
		Told: "the fill is a percentage",
		Text: `{"id":"OST-SW-0058","section":{"kind":"circular","diameter":0.45},"roughness":{"manning":0.013},"bed_slope":0.005,"flows":{"two_year":0.12},"criteria":{"greatest_fill":80}}`,
	},
	{
		Line: 117, ID: `"SAL-RD-0117"`, Status: 422, Pointers: []string{"/criteria"},
		Told: "nobody said what the ditch is to be held to",
		Text: `{"id":"SAL-RD-0117","section":{"kind":"triangular","side_slope":2,"bank_height":0.7},"roughness":{"manning":0.033},"bed_slope":0.004,"flows":{"ten_year":0.2},"criteria":{}}`,
	},
	{
		Line: 176, ID: `"MAR-SG-0176"`, Status: 422, Pointers: []string{"/roughness"},
		Told: "grass has a roughness of its own, and the row gives another",
		Text: `{"id":"MAR-SG-0176","section":{"kind":"parabolic","top_width":2.4,"height":0.4,"bank_height":0.4},"roughness":{"manning":0.045},"bed_slope":0.01,"flows":{"ten_year":0.15},"criteria":{"least_lining_safety":1},"lining":{"kind":"vegetation","stem_height":0.1,"condition":"good","growth_form":"sod","grain_size":0.004}}`,
	},
	{
		Line: 234, ID: `"OST-MD-0234"`, Status: 422, Pointers: []string{"/criterion_flows/least_freeboard/0"},
		Told: "the flow is called otherwise in the two lists",
		Text: `{"id":"OST-MD-0234","section":{"kind":"trapezoidal","bottom_width":4,"side_slope":2,"bank_height":2.1},"roughness":{"manning":0.03},"bed_slope":0.0003,"flows":{"ten_year":5.1,"hundred_year":7.7},"criteria":{"least_freeboard":0.3},"criterion_flows":{"least_freeboard":["100_year"]}}`,
	},
	{
		Line: 293, ID: `"OST-LC-0293"`, Status: 422, Pointers: []string{"/criteria/critical_band"},
		Told: "the band stands the wrong way round",
		Text: `{"id":"OST-LC-0293","section":{"kind":"rectangular","bottom_width":1.5,"bank_height":1},"roughness":{"manning":0.015},"bed_slope":0.004,"flows":{"ten_year":1.6},"criteria":{"critical_band":[1.13,0.86]}}`,
	},
	{
		Line: 348, ID: `"OST-CU-0348"`, Status: 422, Pointers: []string{"/lining/kind"},
		Told: "a pipe is lined with grass: someone copied a column",
		Text: `{"id":"OST-CU-0348","section":{"kind":"circular","diameter":0.9},"bed_slope":0.006,"flows":{"ten_year":0.7},"criteria":{"greatest_fill":0.9},"lining":{"kind":"vegetation","stem_height":0.1,"condition":"good"}}`,
	},
	{
		Line: 412, ID: `"SAL-SW-0412"`, Status: 400, Pointers: []string{"/flows/ten_year"},
		Told: "two flows bear one name",
		Text: `{"id":"SAL-SW-0412","section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013},"bed_slope":0.004,"flows":{"ten_year":0.2,"ten_year":0.26},"criteria":{"greatest_fill":0.85}}`,
	},
	{
		Line: 476, ID: `"MAR-RD-0476"`, Status: 422, Pointers: []string{"/criteria/least_freebord"},
		Told: "a criterion is misspelt",
		Text: `{"id":"MAR-RD-0476","section":{"kind":"trapezoidal","bottom_width":0.4,"side_slope":1.5,"bank_height":0.8},"roughness":{"manning":0.03},"bed_slope":0.006,"flows":{"ten_year":0.3},"criteria":{"least_freebord":0.15}}`,
	},
	{
		Line: 529, ID: `"OST-RD-0529"`, Status: 200, Pointers: nil,
		Told: "the stones are in millimetres: gravel of 40 m is lawful, and a warning doubts it",
		Text: `{"id":"OST-RD-0529","section":{"kind":"trapezoidal","bottom_width":0.5,"side_slope":2,"bank_height":0.9},"bed_slope":0.01,"flows":{"ten_year":0.4},"criteria":{"least_lining_safety":1},"lining":{"kind":"gravel","stone_size":40,"angle_of_repose":38}}`,
	},
	{
		Line: 590, ID: `"QUE-MD-0590"`, Status: 422, Pointers: []string{"/flows/ten_year"},
		Told: "no flow was worked out yet, and the form saved 0",
		Text: `{"id":"QUE-MD-0590","section":{"kind":"trapezoidal","bottom_width":3,"side_slope":2,"bank_height":1.8},"roughness":{"manning":0.03},"bed_slope":0.0002,"flows":{"ten_year":0},"criteria":{"least_freeboard":0.3}}`,
	},
}
