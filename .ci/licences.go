//go:build ignore

// Licences lists the modules that are built into Leat with their licences, or writes the texts of these licences, which must go along with the binary:
//
//	go run .ci/licences.go > deploy/licences.csv
//	go run .ci/licences.go -texts > licences.txt
//
// It asks the go command about linux, for amd64 and arm64, and reads the texts from the module cache. A text that it does not recognise, or that is not among those that
// a program under Leat's licence may be linked with, is an error.
package main

import (
	"bytes"
	"cmp"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"runtime"
	"slices"
	"strings"
)

type module struct {
	Path, Version, Dir string
}

// known tells licences by words of theirs, under their SPDX identifiers.
var known = []struct{ id, words string }{
	{"Apache-2.0", "Apache License Version 2.0, January 2004"},
	{"MPL-2.0", "Mozilla Public License Version 2.0"},
	{"ISC", "Permission to use, copy, modify, and/or distribute this software for any purpose with or without fee is hereby granted"},
	{"ISC", "Permission to use, copy, modify, and distribute this software for any purpose with or without fee is hereby granted"},
	{"MIT", "Permission is hereby granted, free of charge, to any person obtaining a copy of this software and associated documentation files"},
	{"BSD-3-Clause", "Neither the name of"},
	{"BSD-3-Clause", "may be used to endorse or promote products derived from this software without specific"},
	{"BSD-2-Clause", "Redistributions in binary form must reproduce the above copyright notice"},
	{"Unlicense", "This is free and unencumbered software released into the public domain"},
}

var (
	space = regexp.MustCompile(`[\s]+`)
	named = regexp.MustCompile(`(?i)^(licen[cs]e|copying|notice|unlicense)([-.].*)?$`)
)

func main() {
	texts := flag.Bool("texts", false, "write the texts instead of the list")
	flag.Parse()
	if err := run(os.Stdout, *texts); err != nil {
		fmt.Fprintln(os.Stderr, "licences:", err)
		os.Exit(1)
	}
}

func run(w io.Writer, texts bool) error {
	modules, err := linked()
	if err != nil {
		return err
	}
	if !texts {
		fmt.Fprintln(w, "module,version,licence")
	}
	for _, m := range modules {
		files, err := filesOf(m.Dir)
		if err != nil {
			return err
		}
		ids := map[string]bool{}
		var all bytes.Buffer
		for _, name := range files {
			text, err := os.ReadFile(filepath.Join(m.Dir, name))
			if err != nil {
				return err
			}
			told := recognise(text)
			for _, id := range told {
				ids[id] = true
			}
			if len(told) == 0 && !strings.HasPrefix(strings.ToLower(name), "notice") {
				return fmt.Errorf("%s: the licence in %s is not one of those that are known here", m.Path, name)
			}
			fmt.Fprintf(&all, "\n---- %s %s, %s\n\n%s\n", m.Path, m.Version, name, bytes.TrimSpace(text))
		}
		if len(ids) == 0 {
			return fmt.Errorf("%s: no licence", m.Path)
		}
		if texts {
			w.Write(all.Bytes())
			continue
		}
		var list []string
		for id := range ids {
			list = append(list, id)
		}
		slices.Sort(list)
		fmt.Fprintf(w, "%s,%s,%s\n", m.Path, m.Version, strings.Join(list, " AND "))
	}
	return nil
}

// linked returns the modules whose packages are linked into the binary, and Go itself.
func linked() ([]module, error) {
	found := map[string]module{}
	for _, machine := range []string{"amd64", "arm64"} {
		list := exec.Command("go", "list", "-deps", "-tags", "nomsgpack", "-json=Module", "./cmd/leat")
		list.Env = append(os.Environ(), "GOOS=linux", "GOARCH="+machine, "CGO_ENABLED=0")
		list.Stderr = os.Stderr
		out, err := list.Output()
		if err != nil {
			return nil, err
		}
		decoder := json.NewDecoder(bytes.NewReader(out))
		for {
			var p struct {
				Module *struct {
					module
					Main bool
				}
			}
			if err := decoder.Decode(&p); errors.Is(err, io.EOF) {
				break
			} else if err != nil {
				return nil, err
			}
			if p.Module != nil && !p.Module.Main {
				found[p.Module.Path] = p.Module.module
			}
		}
	}
	modules := []module{{"std", strings.TrimPrefix(runtime.Version(), "go"), runtime.GOROOT()}}
	for _, m := range found {
		modules = append(modules, m)
	}
	slices.SortFunc(modules, func(a, b module) int { return cmp.Compare(a.Path, b.Path) })
	return modules, nil
}

func filesOf(folder string) ([]string, error) {
	entries, err := os.ReadDir(folder)
	if err != nil {
		return nil, err
	}
	var names []string
	for _, e := range entries {
		// The exception is where a module's picture comes from; pictures are not linked.
		if !e.IsDir() && e.Name() != "LICENSE-LOGO" && named.MatchString(e.Name()) && !strings.HasSuffix(e.Name(), ".go") {
			names = append(names, e.Name())
		}
	}
	return names, nil
}

// recognise returns all licences that a text holds.
func recognise(text []byte) (ids []string) {
	plain := strings.NewReplacer("* ", "", "# ", "", "// ", "").Replace(space.ReplaceAllString(string(text), " "))
	for _, k := range known {
		if strings.Contains(strings.ToLower(plain), strings.ToLower(k.words)) && !slices.Contains(ids, k.id) {
			ids = append(ids, k.id)
		}
	}
	if slices.Contains(ids, "BSD-3-Clause") { // which has the words of the other, too
		ids = slices.DeleteFunc(ids, func(id string) bool { return id == "BSD-2-Clause" })
	}
	return ids
}
