package geopackage

// Extend registers an extension for a table (requirements 58 to 64), or for a column of it. Doing so twice is doing it once.
func (f *File) Extend(table, column, name, definition, scope string) error {
	if has, err := f.Has("gpkg_extensions"); err != nil {
		return err
	} else if !has {
		if err := f.Run(extensionsTable); err != nil {
			return err
		}
	}
	var col any
	if column != "" {
		col = column
	}
	return f.Run("INSERT INTO gpkg_extensions SELECT ?1, ?2, ?3, ?4, ?5 WHERE NOT EXISTS (SELECT 1 FROM gpkg_extensions WHERE table_name = ?1 AND column_name IS ?2 AND extension_name = ?3)",
		table, col, name, definition, scope)
}
