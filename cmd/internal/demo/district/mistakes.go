package district

// A Mistake is a row that is wrong on purpose, as rows of real registers are.
type Mistake struct {
	Row    int    // from 1
	Class  string // of the asset
	Told   string // what happened in the office
	Column string // the problem of the row must name it, among others perhaps
	spoil  func(*Channel)
}

// Mistakes are the rows that a run must report, each in its column.
var Mistakes = []Mistake{
	{23, "sewer", "the diameter was never measured, and the form saved 0", "height_mm", pipe(func(c *Channel) { c.Height = int64(0) })},
	{81, "roadside_ditch", "a no-data value went through as a width", "bottom_width", ditch(func(c *Channel) { c.BottomWidth = -999.0 })},
	{144, "lined_channel", "the lining is one that the list of materials does not know", "material", ditch(func(c *Channel) { c.Material = "TIMBER" })},
	{190, "roadside_ditch", "the levels of the two ends were exchanged", "downstream_level", ditch(func(c *Channel) {
		c.UpstreamLevel, c.DownstreamLevel = c.DownstreamLevel, c.UpstreamLevel
	})},
	{267, "sewer", "the manhole at the lower end was never levelled", "downstream_level", pipe(func(c *Channel) { c.DownstreamLevel = nil })},
	{333, "main_drain", "a surveyed section whose points were never entered", "offset", ditch(func(c *Channel) { c.Shape, c.BottomWidth, c.SideSlope, c.BankHeight = "SURVEY", nil, nil, nil })},
	{402, "main_drain", "two points were booked in the wrong order, so that the ground runs backwards", "offset", func(c *Channel) {
		ditch(func(c *Channel) { c.Shape, c.BottomWidth, c.SideSlope, c.BankHeight = "SURVEY", nil, nil, nil })(c)
		low := c.DownstreamLevel.(float64)
		for i, at := range []float64{0, 1.2, 2.6, 2.2, 3.9} {
			c.Points = append(c.Points, Point{i + 1, at, round(low+[]float64{1, 0.3, 0, 0.02, 1.1}[i], 3)})
		}
	}},
	{518, "roadside_ditch", "the shape bears the name that another office uses", "shape", ditch(func(c *Channel) { c.Shape = "TRAPEZE" })},
	{590, "sewer", "no flow was worked out yet, and the form saved 0", "flow_design", pipe(func(c *Channel) { c.FlowDesign = 0.0 })},
	{671, "roadside_ditch", "the length is missing", "length", ditch(func(c *Channel) { c.Length = nil })},
	{748, "sewer", "the class is misspelt, so that nobody knows what to ask of it", "class", func(c *Channel) { c.Class = "swer" }},
	{805, "roadside_ditch", "the side slope of a triangular ditch was left out", "side_slope", ditch(func(c *Channel) { c.Shape, c.BottomWidth, c.SideSlope = "VEE", nil, nil })},
	{883, "culvert", "minus one barrel: the form's way of saying unknown", "barrels", pipe(func(c *Channel) { c.Barrels = int64(-1) })},
	{957, "sewer", "the length was entered in whole kilometres", "length", pipe(func(c *Channel) { c.Length = 0.0 })},
	{1088, "culvert", "one size of two was left out", "width_mm", pipe(func(c *Channel) { c.Shape, c.Material, c.Width = "BOX", "CONCRETE", nil })},
	{1150, "sewer", "the flow of the rarer storm is negative, from a subtraction that went wrong", "flow_check", pipe(func(c *Channel) { c.FlowCheck = -0.02 })},
}

func mistakeOf(row int) (*Mistake, bool) {
	for i := range Mistakes {
		if Mistakes[i].Row == row {
			return &Mistakes[i], true
		}
	}
	return nil, false
}

// pipe and ditch make the asset one of a plain shape before it is spoilt, whatever the dice drew.
func pipe(spoil func(*Channel)) func(*Channel) {
	return func(c *Channel) {
		c.Shape, c.Material, c.Height = "PIPE", "CONCRETE", int64(450)
		c.BottomWidth, c.SideSlope, c.TopWidth, c.BankHeight, c.Width, c.CrossFall, c.Points = nil, nil, nil, nil, nil, nil, nil
		spoil(c)
	}
}

func ditch(spoil func(*Channel)) func(*Channel) {
	return func(c *Channel) {
		c.Shape, c.Material, c.BottomWidth, c.SideSlope, c.BankHeight = "TRAP", "EARTH", 0.6, 1.5, 0.9
		c.TopWidth, c.Width, c.Height, c.CrossFall, c.Barrels, c.Points = nil, nil, nil, nil, nil, nil
		if d := c.UpstreamLevel.(float64) - c.DownstreamLevel.(float64); d == 0 {
			c.DownstreamLevel = round(c.UpstreamLevel.(float64)-0.05, 3)
		}
		spoil(c)
	}
}
