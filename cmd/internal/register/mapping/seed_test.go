package mapping

import "flag"

// Properties are drawn from the same seed in every run, unless -rapid.seed says another.
func init() {
	if err := flag.Set("rapid.seed", "1"); err != nil {
		panic(err)
	}
}
