package row

import (
	"math"
	"strconv"
	"strings"
	"testing"
	"time"
)

func TestValues(t *testing.T) {
	moment := time.Date(2026, 3, 4, 5, 6, 7, 123456789, time.FixedZone("", 3600))
	for _, c := range []struct {
		v    Value
		kind Kind
		text string
	}{
		{Value{}, Null, ""},
		{OfInt(-7), Int, "-7"},
		{OfInt(math.MinInt64), Int, "-9223372036854775808"},
		{OfFloat(0.1), Float, "0.1"},
		{OfFloat(1e6), Float, "1000000"},
		{OfFloat(1e21), Float, "1e+21"},
		{OfFloat(-1e-7), Float, "-1e-07"},
		{OfFloat(0), Float, "0"},
		{OfBool(true), Bool, "true"},
		{OfBool(false), Bool, "false"},
		{OfString("a é"), Text, "a é"},
		{OfBytes([]byte{1}), Bytes, "\x01"},
		{OfTime(moment), Time, "2026-03-04T04:06:07.123456Z"},
	} {
		if c.v.Kind != c.kind || c.v.String() != c.text || c.v.IsNull() != (c.kind == Null) || !c.v.Equal(c.v.Clone()) || c.v.Compare(c.v) != 0 {
			t.Errorf("%v %q, want %v %q", c.v.Kind, c.v, c.kind, c.text)
		}
		if c.kind == Float {
			if back, _ := strconv.ParseFloat(c.text, 64); back != c.v.Float() {
				t.Errorf("%v reads back as %v", c.v.Float(), back)
			}
		}
	}
	if OfInt(1).Equal(OfFloat(1)) || OfInt(-1).Compare(OfInt(1)) >= 0 || OfString("a").Compare(OfString("b")) >= 0 || (Value{}).Compare(OfInt(0)) >= 0 || OfFloat(-2).Compare(OfFloat(1)) >= 0 {
		t.Error("order")
	}
}

// What a page holds stays what it was while the page grows, and its memory is used again afterwards.
func TestPages(t *testing.T) {
	var p Page
	for round := range 3 {
		p.Reset(2, 2)
		const rows = 3000
		for i := range rows {
			cells := p.Add(int64(i + 2))
			if !cells[0].IsNull() || !cells[1].IsNull() {
				t.Fatal("a new row is not empty")
			}
			cells[0] = OfInt(int64(i))
			buffer := []byte(strings.Repeat(strconv.Itoa(i), 1+i%50))
			cells[1] = p.Text(buffer)
			buffer[0] = 'x' // the page has a copy
			for k := range i % 3 {
				child := p.AddChild(i)
				child[0], child[1] = OfInt(int64(k)), p.String("child")
			}
		}
		for i := range rows {
			cells := p.Row(i)
			if p.Rows() != rows || p.Line(i) != int64(i+2) || cells[0].Int() != int64(i) || cells[1].String() != strings.Repeat(strconv.Itoa(i), 1+i%50) {
				t.Fatalf("round %d, row %d: %v", round, i, cells)
			}
			if children := p.Children(i); len(children) != 2*(i%3) || len(children) > 2 && children[2].Int() != 1 {
				t.Fatalf("row %d: children %v", i, children)
			}
		}
	}
	allocations := testing.AllocsPerRun(10, func() {
		p.Reset(2, 0)
		for range 1000 {
			p.Add(0)[1] = p.String("text")
		}
	})
	if allocations != 0 {
		t.Errorf("%v allocations", allocations)
	}
}
