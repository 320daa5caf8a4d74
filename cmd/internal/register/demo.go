package register

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"leat/cmd/internal/demo/district"
)

// The files of the demo. deploy/register has a mapping file for each.
const (
	demoGeoPackage = "ostermere.gpkg"
	demoSQL        = "ostermere.sql"
)

// writeDemo writes the register of an invented district into a folder, as a GeoPackage and as SQL for PostgreSQL. Files that exist are left alone.
func writeDemo(ctx context.Context, arguments []string, stdout, stderr io.Writer) Outcome {
	if len(arguments) != 1 || strings.HasPrefix(arguments[0], "-") {
		fmt.Fprintln(stderr, "leat register demo: name the folder that the files are to be written to: leat register demo FOLDER")
		return Misused
	}
	folder := arguments[0]
	if info, err := os.Stat(folder); err != nil || !info.IsDir() {
		fmt.Fprintf(stderr, "leat register demo: there is no folder %s\n", folder)
		return Misused
	}
	for _, file := range []struct {
		name  string
		write func(path string) error
	}{
		{demoGeoPackage, func(path string) error { return district.WriteGeoPackage(ctx, path) }},
		{demoSQL, writeSQL},
	} {
		path := filepath.Join(folder, file.name)
		if err := file.write(path); err != nil {
			fmt.Fprintf(stderr, "leat register demo: %v\n", err)
			return Failed
		}
		fmt.Fprintf(stdout, "%s: %d assets\n", path, district.Rows)
	}
	return Done
}

func writeSQL(path string) (err error) {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, f.Close()) }()
	return district.WriteSQL(f)
}
