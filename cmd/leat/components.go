package main

import (
	"io"
	"runtime"
	"runtime/debug"
	"strings"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/serve"
)

// A bill lists what the binary is made of, as CycloneDX 1.6 in JSON (ECMA-424). It is read from what the linker wrote into the binary, so it needs no network and
// cannot tell of another binary than this one. It bears neither time nor serial number: the same binary gives the same bytes.
type bill struct {
	Format      string      `json:"bomFormat"`
	SpecVersion string      `json:"specVersion"`
	Version     int         `json:"version"`
	Metadata    origin      `json:"metadata"`
	Components  []component `json:"components"`
}

type origin struct {
	Component  component  `json:"component"`
	Properties []property `json:"properties"`
}

type component struct {
	Type       string     `json:"type"`
	Reference  string     `json:"bom-ref"`
	Name       string     `json:"name"`
	Version    string     `json:"version"`
	PackageURL string     `json:"purl,omitempty"`
	Properties []property `json:"properties,omitempty"`
}

type property struct {
	Name  string `json:"name"`
	Value string `json:"value"`
}

// writeComponents writes the bill of a binary.
func writeComponents(w io.Writer, info *debug.BuildInfo, build serve.Build) error {
	b := bill{Format: "CycloneDX", SpecVersion: "1.6", Version: 1, Components: []component{}}
	b.Metadata.Component = component{Type: "application", Reference: "leat", Name: "leat", Version: build.Version}
	for _, s := range info.Settings {
		b.Metadata.Properties = append(b.Metadata.Properties, property{"build:" + s.Key, s.Value})
	}
	b.Components = append(b.Components, library("std", strings.TrimPrefix(runtime.Version(), "go"), ""))
	for _, module := range info.Deps {
		if module.Replace != nil {
			module = module.Replace
		}
		b.Components = append(b.Components, library(module.Path, module.Version, module.Sum))
	}
	return json.MarshalWrite(w, b, jsontext.WithIndent("  "))
}

// library is a Go module; sum is its checksum as go.sum has it.
func library(path, version, sum string) component {
	address := "pkg:golang/" + path + "@" + version
	c := component{Type: "library", Reference: address, Name: path, Version: version, PackageURL: address}
	if sum != "" {
		c.Properties = []property{{"go:sum", sum}}
	}
	return c
}
