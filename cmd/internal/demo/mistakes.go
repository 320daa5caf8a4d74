package demo

// Mistake is a row that is wrong on purpose, as rows of real registers are.
type Mistake struct {
	Line     int
	ID       string // JSON literal; what the answer can still be joined by
	Told     string // what happened in the office
	Text     string
	Status   int      // of the problem that its caller gets; 200 where the row is lawful all the same and is answered
	Pointers []string // the places of the faults in that problem; nil where the place is a matter of syntax
}

// Mistakes are the rows that are wrong on purpose, by line.
var Mistakes = []Mistake{
	{
		Line: 17, ID: `"SAL-RD-0017"`, Status: 422, Pointers: []string{"/bed_slope"},
		Told: "the slope was typed in per mille, 5 for 0.005",
		Text: `{"id":"SAL-RD-0017","section":{"kind":"trapezoidal","bottom_width":0.5,"side_slope":1.5,"bank_height":0.9},"roughness":{"manning":0.03},"bed_slope":5,"discharge":0.21}`,
	},
	{
		Line: 43, ID: `"OST-SW-0043"`, Status: 422, Pointers: []string{"/section/diameter"},
		Told: "the diameter was never measured, and the form saved 0",
		Text: `{"id":"OST-SW-0043","section":{"kind":"circular","diameter":0},"roughness":{"manning":0.013},"bed_slope":0.006,"discharge":0.08}`,
	},
	{
		Line: 74, ID: `"OST-MD-0074"`, Status: 422, Pointers: []string{"/section/bottom_widht", "/section/bottom_width"},
		Told: "a member's name is misspelt, so that the right one is missing too",
		Text: `{"id":"OST-MD-0074","section":{"kind":"trapezoidal","bottom_widht":4.5,"side_slope":2,"bank_height":2.1},"roughness":{"manning":0.03},"bed_slope":0.0003,"discharge":5.6}`,
	},
	{
		Line: 101, ID: `"QUE-MD-0101"`, Status: 422, Pointers: []string{"/section/points/5/0"},
		Told: "two survey points were booked in the wrong order, so that the ground runs backwards",
		Text: `{"id":"QUE-MD-0101","section":{"kind":"surveyed","points":[[0,0.42],[2.1,0.38],[4.05,-0.75],[5.6,-1.61],[8.2,-1.58],[6.9,-1.66],[9.4,-1.55],[11.2,-0.7],[13.1,0.35],[15,0.44]]},"roughness":{"manning":0.032},"bed_slope":0.0002,"discharge":3.1}`,
	},
	{
		Line: 133, ID: `"MAR-SW-0133"`, Status: 422, Pointers: []string{"/section/diameter"},
		Told: "the diameter came over as text with its unit",
		Text: `{"id":"MAR-SW-0133","section":{"kind":"circular","diameter":"450 mm"},"roughness":{"sand_roughness":0.0006},"bed_slope":0.012,"discharge":0.19}`,
	},
	{
		Line: 160, ID: `"OST-LC-0160"`, Status: 422, Pointers: []string{"/roughness"},
		Told: "nobody knows the lining, so the roughness is missing",
		Text: `{"id":"OST-LC-0160","section":{"kind":"rectangular","bottom_width":1.2,"bank_height":0.8},"bed_slope":0.004,"discharge":0.9}`,
	},
	{
		Line: 192, ID: `"OST-RD-0192"`, Status: 400, Pointers: nil,
		Told: "a script wrote its missing value as NaN, which JSON does not know",
		Text: `{"id":"OST-RD-0192","section":{"kind":"triangular","side_slope":2,"bank_height":0.7},"roughness":{"manning":0.035},"bed_slope":0.003,"discharge":NaN}`,
	},
	{
		Line: 221, ID: `"SAL-CU-0221"`, Status: 422, Pointers: []string{"/section/haunch"},
		Told: "the haunch was typed in millimetres",
		Text: `{"id":"SAL-CU-0221","section":{"kind":"box","width":1.8,"height":1.2,"haunch":150},"roughness":{"manning":0.013},"bed_slope":0.002,"discharge":2.4}`,
	},
	{
		Line: 248, ID: `"OST-MD-0248"`, Status: 400, Pointers: []string{"/bed_slope"},
		Told: "two columns of the register are both called bed_slope",
		Text: `{"id":"OST-MD-0248","section":{"kind":"trapezoidal","bottom_width":6,"side_slope":2,"bank_height":2.4},"roughness":{"manning":0.028},"bed_slope":0.0002,"discharge":9.8,"bed_slope":0.0004}`,
	},
	{
		Line: 275, ID: `"MAR-RD-0275"`, Status: 200, Pointers: nil,
		Told: "the slope was booked against the flow; that is an adverse slope and lawful, so the answer says why there is no normal depth",
		Text: `{"id":"MAR-RD-0275","section":{"kind":"trapezoidal","bottom_width":0.4,"side_slope":1.5,"bank_height":0.8},"roughness":{"manning":0.03},"bed_slope":-0.011,"discharge":0.26}`,
	},
	{
		Line: 301, ID: `"QUE-CU-0301"`, Status: 422, Pointers: []string{"/section/height"},
		Told: "one size of two was left out",
		Text: `{"id":"QUE-CU-0301","section":{"kind":"box","width":2.4},"roughness":{"manning":0.015},"bed_slope":0.0008,"discharge":3.3}`,
	},
	{
		Line: 334, ID: `"SAL-SG-0334"`, Status: 422, Pointers: []string{"/roughness/manning"},
		Told: "a raster's no-data value went through as a roughness",
		Text: `{"id":"SAL-SG-0334","section":{"kind":"parabolic","top_width":2.4,"height":0.4,"bank_height":0.4},"roughness":{"manning":-9999},"bed_slope":0.008,"discharge":0.12}`,
	},
	{
		Line: 362, ID: `"OST-MD-0362"`, Status: 422, Pointers: []string{"/section/kind"},
		Told: "the kind bears another language's name",
		Text: `{"id":"OST-MD-0362","section":{"kind":"trapezium","bottom_width":3.5,"side_slope":1.5,"bank_height":1.9},"roughness":{"strickler":33},"bed_slope":0.0005,"discharge":4.1}`,
	},
	{
		Line: 395, ID: `"OST-SW-0395"`, Status: 200, Pointers: nil,
		Told: "the diameter is in millimetres: a pipe of 450 m across is lawful, and only its fill gives it away",
		Text: `{"id":"OST-SW-0395","section":{"kind":"circular","diameter":450},"roughness":{"manning":0.012},"bed_slope":0.008,"discharge":0.16}`,
	},
	{
		Line: 428, ID: `"MAR-LC-0428"`, Status: 400, Pointers: nil,
		Told: "a spreadsheet wrote its decimal comma",
		Text: `{"id":"MAR-LC-0428","section":{"kind":"rectangular","bottom_width":1,"bank_height":0,6},"roughness":{"manning":0.015},"bed_slope":0.02,"discharge":0.75}`,
	},
	{
		Line: 457, ID: `"QUE-MD-0457"`, Status: 422, Pointers: []string{"/section/rows/3/0", "/section/rows/3/1"},
		Told: "a row of an old table was copied twice, so that neither depth nor area rises",
		Text: `{"id":"QUE-MD-0457","section":{"kind":"tabulated","rows":[[0.5,1.625,4.802,4],[1,4,6.606,5.5],[1.5,7.125,8.408,7],[1.5,7.125,8.408,7],[2,11,10.211,8.5]]},"roughness":{"manning":0.03},"bed_slope":0.0003,"discharge":4.4}`,
	},
	{
		Line: 489, ID: `"OST-SW-0489"`, Status: 422, Pointers: []string{"/depth"},
		Told: "the gauged depth is higher than the pipe: it was read from the road",
		Text: `{"id":"OST-SW-0489","section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013},"bed_slope":0.005,"discharge":0.22,"depth":1.85}`,
	},
	{
		Line: 518, ID: `"SAL-CU-0518"`, Status: 422, Pointers: []string{"/barrels"},
		Told: "two and a half barrels: one is half silted",
		Text: `{"id":"SAL-CU-0518","section":{"kind":"box","width":1.5,"height":1.2},"barrels":2.5,"roughness":{"manning":0.013},"bed_slope":0.003,"discharge":5.2}`,
	},
	{
		Line: 551, ID: `"QUE-RD-0551"`, Status: 422, Pointers: []string{"/discharge"},
		Told: "no flow was worked out yet, and the form saved 0",
		Text: `{"id":"QUE-RD-0551","section":{"kind":"triangular","side_slope":1.5,"bank_height":0.6},"roughness":{"manning":0.033},"bed_slope":0.001,"discharge":0}`,
	},
	{
		Line: 583, ID: `"OST-RD-0583"`, Status: 400, Pointers: nil,
		Told: "the export was cut in the middle of a row",
		Text: `{"id":"OST-RD-0583","section":{"kind":"trapezoidal","bottom_width":0.45,"side_sl`,
	},
}
