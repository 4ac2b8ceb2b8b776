// Package published reads the tables beside it, which the project's tests compare with; SOURCES.md says where each is from.
// Only tests import it.
package published

import (
	"encoding/csv"
	"os"
	"path/filepath"
	"testing"
)

// Table returns the rows of a table by column name. A table that is not there, is not CSV or holds no rows fails the test.
func Table(t testing.TB, name string) []map[string]string {
	t.Helper()
	f, err := os.Open(filepath.Join(folder(), name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(all) < 2 {
		t.Fatalf("%s holds no rows", name)
	}
	rows := make([]map[string]string, 0, len(all)-1)
	for _, line := range all[1:] {
		row := map[string]string{}
		for i, column := range all[0] {
			row[column] = line[i]
		}
		rows = append(rows, row)
	}
	return rows
}

// folder is where the tables lie as seen from the package under test: every one is two folders below the project's top.
func folder() string { return filepath.Join("..", "..", "testdata", "published") }
