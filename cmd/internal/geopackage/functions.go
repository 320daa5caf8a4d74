package geopackage

import "zombiezen.com/go/sqlite"

// addFunctions gives a connection the SQL functions that triggers of spatial indexes call (extension gpkg_rtree_index, table of SQL functions). A
// file with such triggers cannot be written to without them.
func addFunctions(conn *sqlite.Conn) error {
	number := func(pick func(Envelope) float64) func(sqlite.Context, []sqlite.Value) (sqlite.Value, error) {
		return func(_ sqlite.Context, arguments []sqlite.Value) (sqlite.Value, error) {
			g, found := geometryOf(arguments[0])
			if !found || g.Empty {
				return sqlite.Value{}, nil
			}
			return sqlite.FloatValue(pick(g.Envelope)), nil
		}
	}
	for name, scalar := range map[string]func(sqlite.Context, []sqlite.Value) (sqlite.Value, error){
		"ST_MinX": number(func(e Envelope) float64 { return e.MinX }),
		"ST_MaxX": number(func(e Envelope) float64 { return e.MaxX }),
		"ST_MinY": number(func(e Envelope) float64 { return e.MinY }),
		"ST_MaxY": number(func(e Envelope) float64 { return e.MaxY }),
		"ST_IsEmpty": func(_ sqlite.Context, arguments []sqlite.Value) (sqlite.Value, error) {
			g, found := geometryOf(arguments[0])
			if !found {
				return sqlite.Value{}, nil
			}
			if g.Empty {
				return sqlite.IntegerValue(1), nil
			}
			return sqlite.IntegerValue(0), nil
		},
	} {
		err := conn.CreateFunction(name, &sqlite.FunctionImpl{NArgs: 1, Scalar: scalar, Deterministic: true, AllowIndirect: true})
		if err != nil {
			return err
		}
	}
	return nil
}

// geometryOf reads a geometry from a value; NULL and what is no geometry give none, and SQL's answer is then NULL.
func geometryOf(v sqlite.Value) (Geometry, bool) {
	if v.Type() != sqlite.TypeBlob {
		return Geometry{}, false
	}
	g, err := ReadGeometry(v.Blob())
	return g, err == nil
}
