// Package record makes the calculation record of an answer: a page of HTML that prints on A4, by which a reviewer can follow the numbers by hand. It holds
// no clock and no formula: equations are shown with the numbers of the answer in them, and nothing is computed anew.
package record
