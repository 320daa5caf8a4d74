package district

import (
	"bufio"
	"fmt"
	"io"
	"strconv"
	"strings"
)

// WriteSQL writes the register as SQL for PostgreSQL: the schema ostermere with the tables channels and section_points. Lines are well-known text in the
// column line; where PostGIS is installed in the database they are a column of geometries too. Its error is the writer's.
func WriteSQL(w io.Writer) error {
	b := bufio.NewWriter(w)
	fmt.Fprintf(b, "-- The asset register of Ostermere, an invented district, for PostgreSQL; made by leat register demo.\n")
	fmt.Fprintf(b, "begin;\ncreate schema ostermere;\ncreate table ostermere.channels (\n")
	names := make([]string, 0, len(columns)+1)
	for _, c := range columns {
		fmt.Fprintf(b, "  %s %s,\n", c.name, c.sql)
		names = append(names, c.name)
	}
	fmt.Fprintf(b, "  line text -- from upstream to downstream in the district's own grid: easting, northing, level, distance\n);\n")
	fmt.Fprintf(b, "create table ostermere.section_points (\n  asset_code text,\n  place integer,\n  \"offset\" double precision,\n  level double precision\n);\n")
	for _, c := range columns {
		if c.about != "" || strings.Contains(c.title, "[") {
			fmt.Fprintf(b, "comment on column ostermere.channels.%s is %s;\n", c.name, literal(strings.TrimSuffix(c.title+": "+c.about, ": ")))
		}
	}
	names = append(names, "line")
	channels := Channels()
	inserts(b, "insert into ostermere.channels ("+strings.Join(names, ", ")+") values", len(channels), func(i int) {
		c := &channels[i]
		for _, k := range columns {
			b.WriteString(literal(k.cell(c)))
			b.WriteString(", ")
		}
		b.WriteString(literal(wellKnown(c.Line)))
	})
	type booked struct {
		code string
		Point
	}
	var points []booked
	for i := range channels {
		for _, p := range channels[i].Points {
			points = append(points, booked{channels[i].Code, p})
		}
	}
	inserts(b, "insert into ostermere.section_points (asset_code, place, \"offset\", level) values", len(points), func(i int) {
		p := &points[i]
		fmt.Fprintf(b, "%s, %d, %s, %s", literal(p.code), p.Place, literal(p.Offset), literal(p.Level))
	})
	b.WriteString("create index on ostermere.section_points (asset_code);\n")
	b.WriteString(`do $$
begin
  if exists (select from pg_extension where extname = 'postgis') then
    alter table ostermere.channels add column geom geometry(LineStringZM);
    update ostermere.channels set geom = ST_GeomFromText(line);
    create index on ostermere.channels using gist (geom);
  end if;
end
$$;
commit;
analyze ostermere.channels;
analyze ostermere.section_points;
`)
	return b.Flush()
}

// rowsPerInsert keeps statements short enough to read.
const rowsPerInsert = 100

func inserts(b *bufio.Writer, head string, rows int, one func(int)) {
	for i := range rows {
		if i%rowsPerInsert == 0 {
			b.WriteString(head)
		}
		b.WriteString("\n  (")
		one(i)
		b.WriteByte(')')
		if i%rowsPerInsert == rowsPerInsert-1 || i == rows-1 {
			b.WriteString(";\n")
		} else {
			b.WriteByte(',')
		}
	}
}

// literal writes a cell as SQL.
func literal(v any) string {
	switch v := v.(type) {
	case float64:
		return decimal(v)
	case int64:
		return strconv.FormatInt(v, 10)
	case string:
		return "'" + strings.ReplaceAll(v, "'", "''") + "'"
	}
	return "null"
}

func decimal(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

// wellKnown writes a line as well-known text (ISO 13249-3).
func wellKnown(line []Vertex) string {
	var b strings.Builder
	b.WriteString("LINESTRING ZM (")
	for i, v := range line {
		if i > 0 {
			b.WriteString(", ")
		}
		b.WriteString(decimal(v.X) + " " + decimal(v.Y) + " " + decimal(v.Z) + " " + decimal(v.M))
	}
	b.WriteByte(')')
	return b.String()
}
