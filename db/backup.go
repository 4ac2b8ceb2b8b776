package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io"
	"net/url"
	"os"
	"path/filepath"
	"strconv"
	"time"

	"github.com/google/uuid"
)

// Backup writes a copy of the database to a new file while the server goes on writing. The copy is whole and proved
// before it gets its name: VACUUM INTO reads one snapshot, but does not sync what it wrote. What was acknowledged
// before Backup was called is in it.
func (s *Store) Backup(ctx context.Context, to string) (Proof, error) {
	if _, err := os.Lstat(to); err == nil {
		return Proof{}, fmt.Errorf("%s is there already; a backup replaces nothing", to)
	}
	before, err := head(ctx, s.read)
	if err != nil {
		return Proof{}, err
	}
	part := to + ".part"
	if err := os.Remove(part); err != nil && !errors.Is(err, os.ErrNotExist) {
		return Proof{}, err
	}
	defer os.Remove(part) // after the rename there is none
	if err := s.copyTo(ctx, part); err != nil {
		return Proof{}, fmt.Errorf("copy: %w", err)
	}
	if err := syncFile(part); err != nil {
		return Proof{}, err
	}
	proof, err := ProveFile(ctx, part)
	if err != nil {
		return proof, err
	}
	if len(proof.Faults) > 0 {
		return proof, fmt.Errorf("the copy does not hold: %s", proof.Faults[0])
	}
	if proof.Head.Seq < before.Seq {
		return proof, fmt.Errorf("the copy ends at entry %d, the log had %d", proof.Head.Seq, before.Seq)
	}
	if err := os.Rename(part, to); err != nil {
		return proof, err
	}
	return proof, syncFile(filepath.Dir(to))
}

// copyTo uses a connection of its own: on the writing one, uploads would wait for the whole copy.
func (s *Store) copyTo(ctx context.Context, path string) error {
	pool, err := sql.Open("sqlite3", dsn(s.path, url.Values{"_busy_timeout": {"5000"}}))
	if err != nil {
		return err
	}
	defer pool.Close()
	_, err = pool.ExecContext(ctx, "VACUUM INTO ?", path)
	return err
}

// ProveFile proves a database file that no server has open, a backup above all, without changing it.
func ProveFile(ctx context.Context, path string) (Proof, error) {
	s, err := openToRead(path)
	if err != nil {
		return Proof{}, err
	}
	defer s.Close()
	if _, err := epoch(ctx, s.read); err != nil {
		return Proof{}, fmt.Errorf("%s is no database of crossplumb: %w", path, err)
	}
	return s.Prove(ctx)
}

// openToRead opens a file that nobody writes; nothing is made beside it.
func openToRead(path string) (*Store, error) {
	path, err := filepath.Abs(path)
	if err != nil {
		return nil, err
	}
	if _, err := os.Stat(path); err != nil {
		return nil, err
	}
	pool, err := sql.Open("sqlite3", dsn(path, url.Values{"mode": {"ro"}, "_query_only": {"1"}}))
	if err != nil {
		return nil, err
	}
	return &Store{path: path, read: pool, now: time.Now}, nil
}

// Restored tells what Restore did.
type Restored struct {
	Proof Proof
	Epoch int64
	// Kept is where the database that was there has gone, "" where there was none.
	Kept string
}

// Restore puts a backup in the place of the database at path, whose server must be stopped. What is there is kept
// beside it. The epoch rises, so that every phone offers again what the backup does not have; the desk's own chain of
// entries begins anew, since the numbers that it used after the backup may be known elsewhere; and all sessions end,
// since those that were ended after the backup would be open again.
func Restore(ctx context.Context, from, path string, now time.Time) (Restored, error) {
	proof, err := ProveFile(ctx, from)
	if err != nil {
		return Restored{}, err
	}
	if len(proof.Faults) > 0 {
		return Restored{Proof: proof}, fmt.Errorf("the backup does not hold: %s", proof.Faults[0])
	}
	part := path + ".part"
	for _, suffix := range []string{"", "-wal", "-shm", "-journal"} {
		if err := os.Remove(part + suffix); err != nil && !errors.Is(err, os.ErrNotExist) {
			return Restored{}, err
		}
	}
	if err := copyFile(from, part); err != nil {
		return Restored{}, err
	}
	result := Restored{Proof: proof}
	if result.Epoch, err = rise(ctx, part, latestEpoch(ctx, path), now); err != nil {
		return Restored{}, err
	}
	if _, err := os.Lstat(path); err == nil {
		result.Kept = path + ".before-" + now.UTC().Format("20060102T150405Z")
		// The write-ahead log belongs to the file and goes with it, under the name that SQLite looks for.
		for _, suffix := range []string{"-wal", "-shm", ""} {
			if err := os.Rename(path+suffix, result.Kept+suffix); err != nil && !errors.Is(err, os.ErrNotExist) {
				return Restored{}, err
			}
		}
	}
	if err := os.Rename(part, path); err != nil {
		return Restored{}, err
	}
	return result, syncFile(filepath.Dir(path))
}

// latestEpoch is that of the database which is replaced, 0 where it cannot be read: it may be why there is a restore.
func latestEpoch(ctx context.Context, path string) int64 {
	pool, err := sql.Open("sqlite3", dsn(path, url.Values{"mode": {"rw"}, "_busy_timeout": {"5000"}}))
	if err != nil {
		return 0
	}
	defer pool.Close()
	latest, err := epoch(ctx, pool)
	if err != nil {
		return 0
	}
	return latest
}

// rise makes a copied file the next epoch.
func rise(ctx context.Context, path string, latest int64, now time.Time) (int64, error) {
	s, err := Open(ctx, Config{Path: path, Now: func() time.Time { return now }})
	if err != nil {
		return 0, err
	}
	defer s.Close()
	var next int64
	err = s.inTx(ctx, func(tx *sql.Tx) error {
		own, err := epoch(ctx, tx)
		if err != nil {
			return err
		}
		next = max(own, latest) + 1
		for key, value := range map[string]string{"epoch": strconv.FormatInt(next, 10), "desk_device": uuid.NewString()} {
			if _, err := tx.ExecContext(ctx, "UPDATE meta SET value = ? WHERE key = ?", value, key); err != nil {
				return err
			}
		}
		if _, err := tx.ExecContext(ctx, "DELETE FROM sessions"); err != nil {
			return err
		}
		return s.audit(ctx, tx, "", "restored", "epoch "+strconv.FormatInt(next, 10))
	})
	if err != nil {
		return 0, err
	}
	return next, s.Close()
}

func copyFile(from, to string) error {
	in, err := os.Open(from)
	if err != nil {
		return err
	}
	defer in.Close()
	out, err := os.OpenFile(to, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o600)
	if err != nil {
		return err
	}
	if _, err := io.Copy(out, in); err != nil {
		out.Close()
		return err
	}
	if err := out.Sync(); err != nil {
		out.Close()
		return err
	}
	return out.Close()
}

// syncFile puts a file, or the names in a folder, on disk.
func syncFile(path string) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	return f.Sync()
}
