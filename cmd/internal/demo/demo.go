package demo

import (
	"bufio"
	"fmt"
	"io"
	"math/rand/v2"
)

// Rows is the number of rows in the register.
const Rows = 600

// Asset is one row of the register.
type Asset struct {
	Line  int    // its line in the file, from 1; also the number in its id
	ID    string // its id as a JSON literal: "OST-MD-0041" in quotes, or a bare number
	Place string // the part of the district that it lies in; empty for the rows that are wrong on purpose
	Text  string // the row: one JSON object, without a line feed; not JSON where a mistake spoiled it

	laid laid // as it was drawn; without content for the rows that are wrong on purpose
}

// Register returns the assets in the order of the file.
func Register() []Asset {
	r := rand.New(rand.NewPCG(1887, 41)) // any fixed pair will do; changing it changes the register
	wrong := make(map[int]Mistake, len(Mistakes))
	for _, m := range Mistakes {
		wrong[m.Line] = m
	}
	kinds := shuffled(r, Rows-len(Mistakes))
	assets := make([]Asset, 0, Rows)
	for line := 1; line <= Rows; line++ {
		if m, ok := wrong[line]; ok {
			assets = append(assets, Asset{Line: line, ID: m.ID, Text: m.Text})
			continue
		}
		p := place(r)
		k := kinds[0]
		kinds = kinds[1:]
		id := fmt.Sprintf(`"%s-%s-%04d"`, p.code, k.code, line)
		if k.numbered { // the roads department numbers its gutters and knows no letters
			id = fmt.Sprint(70000 + line)
		}
		l := lay(r, p, k)
		assets = append(assets, Asset{Line: line, ID: id, Place: p.name, Text: l.row(id), laid: l})
	}
	return assets
}

// Write writes the register as NDJSON. Its error is the writer's.
func Write(w io.Writer) error {
	b := bufio.NewWriter(w)
	for _, a := range Register() {
		b.WriteString(a.Text)
		b.WriteByte('\n')
	}
	return b.Flush()
}

// A class is one sort of asset with its code in ids and its share of the register.
type class struct {
	code     string
	share    int // rows in Rows
	numbered bool
	draw     func(*pen) design
}

// classes adds up to Rows in share; the rows that are wrong on purpose are taken off the roadside ditches.
var classes = []class{
	{code: "RD", share: 150, draw: roadsideDitch},
	{code: "MD", share: 80, draw: mainDrain},
	{code: "LC", share: 50, draw: linedChannel},
	{code: "SW", share: 150, draw: sewer},
	{code: "CU", share: 70, draw: culvert},
	{code: "GU", share: 40, numbered: true, draw: gutter},
	{code: "FL", share: 20, draw: flume},
	{code: "SG", share: 40, draw: swale},
}

// shuffled returns the class of each of n rows.
func shuffled(r *rand.Rand, n int) []class {
	var list []class
	for _, c := range classes {
		for range c.share {
			list = append(list, c)
		}
	}
	list = list[len(list)-n:]
	r.Shuffle(len(list), func(i, j int) { list[i], list[j] = list[j], list[i] })
	return list
}

// A parish is a part of the district.
type parish struct {
	code, name string
	share      int     // in a hundred
	feet       bool    // its drawings are in feet
	low, high  float64 // levels of its ground in metres above datum; fen ground lies below
}

// parishes are invented. The old airfield came with drawings in feet, and nobody has redrawn them.
var parishes = []parish{
	{code: "OST", name: "Ostermere", share: 40, low: 1.5, high: 9},
	{code: "SAL", name: "Sallowby", share: 20, low: 3, high: 14},
	{code: "MAR", name: "Marlhithe", share: 17, low: 12, high: 40},
	{code: "QUE", name: "Quenfen", share: 15, low: -1.8, high: 0.6},
	{code: "AIR", name: "Reedlode Airfield", share: 8, feet: true, low: 4, high: 6},
}

func place(r *rand.Rand) parish {
	n := r.IntN(100)
	for _, p := range parishes {
		if n < p.share {
			return p
		}
		n -= p.share
	}
	return parishes[0]
}
