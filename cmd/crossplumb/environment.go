package main

import (
	"flag"
	"fmt"
	"os"
	"strings"
)

// environmentPrefix starts the names of variables that stand for flags: CROSSPLUMB_TLS_CERT for --tls-cert.
const environmentPrefix = "CROSSPLUMB_"

// fromEnvironment sets the flags that the command line left alone. A variable that no flag knows is an error: a
// misspelt one would be ignored in silence.
func fromEnvironment(f *flag.FlagSet) error {
	given := map[string]bool{}
	f.Visit(func(one *flag.Flag) { given[one.Name] = true })
	for _, line := range os.Environ() {
		name, value, _ := strings.Cut(line, "=")
		flagName, ours := strings.CutPrefix(name, environmentPrefix)
		if !ours || !serveVariable(name) {
			continue
		}
		flagName = strings.ReplaceAll(strings.ToLower(flagName), "_", "-")
		if f.Lookup(flagName) == nil {
			return usageError{fmt.Errorf("the environment has %s, which stands for no flag", name)}
		}
		if given[flagName] {
			continue
		}
		if err := f.Set(flagName, value); err != nil {
			return usageError{fmt.Errorf("%s: %w", name, err)}
		}
	}
	return nil
}

// serveVariable leaves out what the browser tests use to find the program.
func serveVariable(name string) bool { return name != "CROSSPLUMB_BIN" }
