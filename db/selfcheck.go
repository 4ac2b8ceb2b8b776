package db

import (
	"context"
	"database/sql"
	"fmt"
	"strings"
)

// oldestSQLite is 3.51.3: from 3.7.0 to 3.51.2 a checkpoint that runs into a write could lose committed data in WAL
// mode (sqlite.org/wal.html, "The WAL-Reset Bug").
var oldestSQLite = [3]int{3, 51, 3}

// selfCheck reads back, on connections of both pools, what the log's durability rests on. A misspelt option in a
// connection name is ignored in silence by the driver, so believing it is not enough.
func (s *Store) selfCheck(ctx context.Context) error {
	var version string
	if err := s.write.QueryRowContext(ctx, "SELECT sqlite_version()").Scan(&version); err != nil {
		return err
	}
	if err := checkVersion(version); err != nil {
		return err
	}
	if err := checkPool(ctx, s.write, "writing", 1, map[string]string{
		"journal_mode": "wal", "synchronous": "2", "foreign_keys": "1", "busy_timeout": "5000", "query_only": "0",
		"recursive_triggers": "1",
	}); err != nil {
		return err
	}
	if err := checkPool(ctx, s.read, "reading", readers, map[string]string{
		"journal_mode": "wal", "synchronous": "2", "foreign_keys": "1", "busy_timeout": "5000", "query_only": "1",
	}); err != nil {
		return err
	}
	var verdict string
	if err := s.read.QueryRowContext(ctx, "PRAGMA quick_check(1)").Scan(&verdict); err != nil {
		return fmt.Errorf("quick_check: %w", err)
	}
	if verdict != "ok" {
		return fmt.Errorf("the database file is damaged, quick_check says: %s", verdict)
	}
	return nil
}

func checkVersion(version string) error {
	var v [3]int
	if _, err := fmt.Sscanf(version, "%d.%d.%d", &v[0], &v[1], &v[2]); err != nil {
		return fmt.Errorf("SQLite calls itself %q, which is no version", version)
	}
	for i := range v {
		if v[i] != oldestSQLite[i] {
			if v[i] < oldestSQLite[i] {
				return fmt.Errorf("SQLite %s can lose committed data in WAL mode; %d.%d.%d or newer is needed",
					version, oldestSQLite[0], oldestSQLite[1], oldestSQLite[2])
			}
			return nil
		}
	}
	return nil
}

// checkPool holds several connections at once, so that each is a different one.
func checkPool(ctx context.Context, pool *sql.DB, name string, connections int, want map[string]string) error {
	held := make([]*sql.Conn, 0, connections)
	defer func() {
		for _, c := range held {
			c.Close()
		}
	}()
	for range connections {
		c, err := pool.Conn(ctx)
		if err != nil {
			return err
		}
		held = append(held, c)
		for pragma, expected := range want {
			var got string
			if err := c.QueryRowContext(ctx, "PRAGMA "+pragma).Scan(&got); err != nil {
				return err
			}
			if strings.ToLower(got) != expected {
				return fmt.Errorf("a %s connection has %s=%s instead of %s: refusing to run, an acknowledged entry could be lost",
					name, pragma, got, expected)
			}
		}
	}
	return nil
}
