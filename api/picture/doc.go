// Package picture draws answers: one display list for each operation, an SVG writer and a PNG writer of it.
//
// A picture is 640 units wide, to be read on a screen of that many pixels and on A4. Lines differ by dash and label as well as by colour. Text in SVG is
// text; PNG takes the Go fonts, which lie in the binary. Equal answers give equal bytes. Curves and shapes are sampled by
// api/operation: nothing is computed here but where on the paper a number stands.
package picture
