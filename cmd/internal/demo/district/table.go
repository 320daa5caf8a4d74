package district

// A column of the table of channels, in the words of both databases.
type column struct {
	name     string
	geo, sql string // types
	title    string
	about    string
	cell     func(*Channel) any
}

var columns = []column{
	{"asset_code", "TEXT", "text primary key", "Asset", "code of the asset", func(c *Channel) any { return c.Code }},
	{"parish", "TEXT", "text", "Parish", "", func(c *Channel) any { return c.Parish }},
	{"class", "TEXT", "text", "Class", "sort of asset, by which criteria differ", func(c *Channel) any { return c.Class }},
	{"shape", "TEXT", "text", "Shape", "the office's code of the section's shape", func(c *Channel) any { return c.Shape }},
	{"material", "TEXT", "text", "Material", "the office's code of the lining", func(c *Channel) any { return c.Material }},
	{"status", "TEXT", "text", "Status", "in_use, planned or abandoned", func(c *Channel) any { return c.Status }},
	{"bottom_width", "DOUBLE", "double precision", "Bottom width [m]", "", func(c *Channel) any { return c.BottomWidth }},
	{"side_slope", "DOUBLE", "double precision", "Side slope [x:1]", "horizontal for each 1 up", func(c *Channel) any { return c.SideSlope }},
	{"top_width", "DOUBLE", "double precision", "Top width [m]", "of swales, at the bank", func(c *Channel) any { return c.TopWidth }},
	{"bank_height", "DOUBLE", "double precision", "Bank height [m]", "", func(c *Channel) any { return c.BankHeight }},
	{"width_mm", "INTEGER", "integer", "Width [mm]", "of boxes, inside", func(c *Channel) any { return c.Width }},
	{"height_mm", "INTEGER", "integer", "Height [mm]", "inside; of round pipes the diameter, of gutters the curb", func(c *Channel) any { return c.Height }},
	{"cross_fall", "DOUBLE", "double precision", "Cross fall [%]", "of gutters", func(c *Channel) any { return c.CrossFall }},
	{"barrels", "INTEGER", "integer", "Barrels", "equal ones side by side; empty for one", func(c *Channel) any { return c.Barrels }},
	{"upstream_level", "DOUBLE", "double precision", "Upstream bed level [m]", "above datum", func(c *Channel) any { return c.UpstreamLevel }},
	{"downstream_level", "DOUBLE", "double precision", "Downstream bed level [m]", "above datum", func(c *Channel) any { return c.DownstreamLevel }},
	{"length", "DOUBLE", "double precision", "Length [m]", "in plan", func(c *Channel) any { return c.Length }},
	{"flow_design", "DOUBLE", "double precision", "Design flow [m3/s]", "", func(c *Channel) any { return c.FlowDesign }},
	{"flow_check", "DOUBLE", "double precision", "Check flow [m3/s]", "of the rarer storm", func(c *Channel) any { return c.FlowCheck }},
	{"surveyed", "DATE", "date", "Surveyed", "", func(c *Channel) any { return c.Surveyed }},
	{"remark", "TEXT", "text", "Remark", "", func(c *Channel) any { return c.Remark }},
}
