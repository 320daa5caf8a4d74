package postgres

import (
	"context"
	"fmt"
	"os"
	"strings"
	"time"

	"github.com/jackc/pgx/v5/pgxpool"

	"leat/cmd/internal/register/store"
)

// connect returns connections to the database of a specification. What that leaves empty comes from the environment as libpq's programs read it; a
// password comes from PGPASSWORD, PGPASSFILE, a service file or PasswordFile. No error text holds one.
func connect(ctx context.Context, spec *store.DatabaseSpec) (*pgxpool.Pool, error) {
	config, err := configure(spec)
	if err != nil {
		return nil, err
	}
	pool, err := pgxpool.NewWithConfig(ctx, config)
	if err != nil {
		return nil, &store.Misfit{Detail: fmt.Sprintf("The database cannot be used: %v.", err)}
	}
	if err := pool.Ping(ctx); err != nil {
		pool.Close()
		return nil, &store.Misfit{Detail: fmt.Sprintf("The database does not let us in: %v. Host, port, database and user come from the mapping file or from PGHOST, PGPORT, PGDATABASE, "+
			"PGUSER or PGSERVICE, a password from PGPASSWORD, PGPASSFILE or password_file.", err)}
	}
	return pool, nil
}

func configure(spec *store.DatabaseSpec) (*pgxpool.Config, error) {
	var words []string
	add := func(key, value string) {
		if value != "" {
			words = append(words, key+"='"+strings.NewReplacer(`\`, `\\`, `'`, `\'`).Replace(value)+"'")
		}
	}
	add("host", spec.Host)
	add("port", spec.Port)
	add("dbname", spec.Name)
	add("user", spec.User)
	config, err := pgxpool.ParseConfig(strings.Join(words, " "))
	if err != nil {
		return nil, &store.Misfit{Detail: fmt.Sprintf("The settings of the connection are not understood: %v.", err)}
	}
	if spec.PasswordFile != "" {
		content, err := os.ReadFile(spec.PasswordFile)
		if err != nil {
			return nil, &store.Misfit{Field: "password_file", Detail: fmt.Sprintf("The file of the password cannot be read: %v.", err)}
		}
		config.ConnConfig.Password = strings.TrimRight(string(content), "\r\n")
	}
	parameters := config.ConnConfig.RuntimeParams
	if parameters["application_name"] == "" {
		parameters["application_name"] = "leat register"
	}
	// The spellings of moments, dates and intervals do not depend on who reads.
	parameters["timezone"] = "UTC"
	parameters["datestyle"] = "ISO"
	parameters["intervalstyle"] = "iso_8601"
	parameters["client_encoding"] = "UTF8"
	// A plan for all parameters would not see how small a page is.
	parameters["plan_cache_mode"] = "force_custom_plan"
	// Ordered reads are read to their end.
	parameters["cursor_tuple_fraction"] = "1"
	config.MaxConns = 32
	config.MinConns = 0
	config.MaxConnIdleTime = 5 * time.Minute
	if config.ConnConfig.ConnectTimeout == 0 {
		config.ConnConfig.ConnectTimeout = 15 * time.Second
	}
	return config, nil
}
