package picture

import (
	"bufio"
	"bytes"
	"os"
	"path/filepath"
	"testing"

	"leat/api/operation"
)

// boxOf returns the place that a text takes, as wide as any viewer may draw it.
func boxOf(it *item) rectangle {
	width := wide(it.text, it.size)
	if it.bold {
		width *= 1.08
	}
	x := it.points[0].x
	switch it.anchor {
	case middle:
		x -= width / 2
	case end:
		x -= width
	}
	return rectangle{x, it.points[0].y - 0.75*it.size, x + width, it.points[0].y + 0.15*it.size}
}

// overlapping returns what is wrong with the texts of a picture: pairs that overlap, and those that leave the paper.
func overlapping(l *list) (faults [][2]string) {
	var boxes []rectangle
	var texts []string
	for i := range l.items {
		if l.items[i].shape != words {
			continue
		}
		b := boxOf(&l.items[i])
		if b.left < -1 || b.right > l.width+1 || b.top < 0 || b.bottom > l.height {
			faults = append(faults, [2]string{l.items[i].text, "beyond the paper"})
		}
		for j, o := range boxes {
			if b.left < o.right && o.left < b.right && b.top < o.bottom && o.top < b.bottom {
				faults = append(faults, [2]string{texts[j], l.items[i].text})
			}
		}
		boxes, texts = append(boxes, b), append(texts, l.items[i].text)
	}
	return faults
}

// TestLabelsDoNotOverlap looks at every picture of the demo and of the samples.
func TestLabelsDoNotOverlap(t *testing.T) {
	looked := 0
	look := func(name string, op *operation.Operation, body []byte) {
		solved, problem := op.Solve(body, operation.Options{})
		if problem != nil {
			return // the demo has some that have no answer
		}
		l, problem := drawn(&solved)
		if problem != nil {
			t.Fatalf("%s: %v", name, problem)
		}
		looked++
		for _, fault := range overlapping(l) {
			t.Errorf("%s: %q and %q", name, fault[0], fault[1])
		}
	}
	for _, s := range golden(t) {
		look(s.name, s.op, s.body)
	}
	for file, op := range map[string]*operation.Operation{"ostermere": &operation.Depths, "ostermere_appraisals": &operation.Appraisal, "ostermere_profiles": &operation.Profile} {
		data, err := os.ReadFile(filepath.Join("..", "..", "testdata", file+".ndjson"))
		if err != nil {
			t.Fatal(err)
		}
		lines := bufio.NewScanner(bytes.NewReader(data))
		lines.Buffer(nil, 1<<22)
		for lines.Scan() {
			look(string(lines.Bytes()[:min(40, len(lines.Bytes()))]), op, lines.Bytes())
		}
	}
	if looked < 1100 {
		t.Errorf("only %d pictures were looked at", looked)
	}
	// The test itself: two texts at one place, and one off the paper.
	l := &list{width: 100, height: 100}
	l.write(ink, point{10, 50}, start, common, "abc")
	l.write(ink, point{12, 52}, start, common, "def")
	l.write(ink, point{90, 20}, start, common, "much too long")
	if len(overlapping(l)) != 2 {
		t.Errorf("%v", overlapping(l))
	}
}
