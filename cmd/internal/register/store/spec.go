package store

// A SourceSpec is the part `source` of a mapping file.
type SourceSpec struct {
	Format string // csv, geojson, geopackage, postgres
	Path   string // of the file, made absolute by the folder of the mapping file
	Table  string // table, view or layer
	Schema string // PostgreSQL; empty for the search path
	Key    string // column
	Filter []Condition
	Points *PointsSpec

	CSV      CSVSpec
	Database DatabaseSpec
}

// A TargetSpec is the part `target` of a mapping file.
type TargetSpec struct {
	Format   string
	Path     string
	Table    string
	Schema   string
	Problems string // table or file of the problems
	// Overwrite allows a file that exists to be replaced. Tables that are ours are updated in any case, others never touched.
	Overwrite bool

	CSV      CSVSpec
	Database DatabaseSpec
}

// A PointsSpec is the child table that holds the points of surveyed sections.
type PointsSpec struct {
	Path, Table, Schema string
	Key                 string // column that holds the key of the asset
	Order               string // column by which points follow each other; empty for the offset
	Offset, Level       string // columns
}

// A CSVSpec says how a CSV file is written.
type CSVSpec struct {
	Delimiter byte // ',' unless given
	Decimal   byte // '.' unless given
}

// A DatabaseSpec says which PostgreSQL is meant. What is empty comes from the environment as libpq's programs read it (PGHOST, PGSERVICE, …).
// Passwords come from PGPASSWORD, PGPASSFILE or PasswordFile, never from the mapping file or the command line.
type DatabaseSpec struct {
	Host, Port, Name, User string
	PasswordFile           string
}
