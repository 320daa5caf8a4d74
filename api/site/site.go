// Package site holds the pages for people. They need nothing from outside and no script.
package site

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"fmt"
)

//go:embed page.html
var page []byte

//go:embed links.json
var links []byte

// Page is the page at the root.
func Page() []byte { return page }

// Links is the same for programs: what there is, and where.
func Links() []byte { return links }

// ContentSecurityPolicy is the header under which Page and Problems may be shown: its own style and nothing else.
func ContentSecurityPolicy() string {
	sum := sha256.Sum256(style(page))
	return fmt.Sprintf("default-src 'none'; style-src 'sha256-%s'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'",
		base64.StdEncoding.EncodeToString(sum[:]))
}

// style returns what stands between the style tags; a policy's hash covers exactly that.
func style(page []byte) []byte {
	_, rest, _ := bytes.Cut(page, []byte("<style>"))
	text, _, _ := bytes.Cut(rest, []byte("</style>"))
	return text
}
