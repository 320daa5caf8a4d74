// Package register is the command that carries a register through a mapping file: check, run, and work.
package register

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"

	"leat/cmd/internal/register/csvfile"
	"leat/cmd/internal/register/geojson"
	"leat/cmd/internal/register/geopackage"
	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/postgres"
	"leat/cmd/internal/register/store"
)

// A format is one kind of file or database that registers live in.
type format struct {
	source func(context.Context, *store.SourceSpec) (store.Source, error)
	target func(context.Context, *store.TargetSpec) (store.Target, error)
}

// formats are all kinds, by the name that a mapping file gives them.
var formats = map[string]format{
	"csv":        {csvfile.OpenSource, csvfile.OpenTarget},
	"geojson":    {geojson.OpenSource, geojson.OpenTarget},
	"geopackage": {geopackage.OpenSource, geopackage.OpenTarget},
	"postgres":   {postgres.OpenSource, postgres.OpenTarget},
}

func openSource(ctx context.Context, file *mapping.File) (store.Source, error) {
	f, found := formats[file.Source.Format]
	if !found {
		return nil, file.Place("source", &store.Misfit{Detail: fmt.Sprintf("This build cannot read %s.", file.Source.Format)})
	}
	source, err := f.source(ctx, &file.Source)
	if err != nil {
		return nil, placed(file, "source", err)
	}
	return source, nil
}

func openTarget(ctx context.Context, file *mapping.File) (store.Target, error) {
	f, found := formats[file.Target.Format]
	switch {
	case !found:
		return nil, file.Place("target", &store.Misfit{Detail: fmt.Sprintf("This build cannot write %s.", file.Target.Format)})
	case sameFile(file):
		return nil, file.Place("target", &store.Misfit{Field: "path", Detail: "The results would overwrite the register itself; name another file."})
	}
	target, err := f.target(ctx, &file.Target.TargetSpec)
	if err != nil {
		return nil, placed(file, "target", err)
	}
	return target, nil
}

// sameFile reports whether a text file would be read and written at once. A GeoPackage may well hold both tables.
func sameFile(file *mapping.File) bool {
	if file.Target.Format == "geopackage" || file.Target.Path == "" {
		return false
	}
	target := filepath.Clean(file.Target.Path)
	if target == filepath.Clean(file.Source.Path) {
		return true
	}
	points := file.Source.Points
	return points != nil && points.Path != "" && target == filepath.Clean(points.Path)
}

// placed gives a misfit its line of the mapping file.
func placed(file *mapping.File, part string, err error) error {
	var misfit *store.Misfit
	if errors.As(err, &misfit) {
		return file.Place(part, misfit)
	}
	return err
}
