package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"os"
	"path/filepath"
	"time"

	"crossplumb/db"
	"crossplumb/server"
)

// demoCost is the least that OWASP's password storage sheet advises (19 MiB, two passes): the passphrases of the demo
// are printed on the screen, so more would only make its start slow.
var demoCost = server.HashCost{MemoryKiB: 19 << 10, Passes: 2, Lanes: 1}

func runDemo(ctx context.Context, args []string, io streams) error {
	var listen, data string
	var fresh bool
	f := flags("demo", io)
	f.StringVar(&listen, "listen", "127.0.0.1:8480", "address on this machine to listen on")
	f.StringVar(&data, "data", "", "folder to keep the demo in; without it one in your cache folder")
	f.BoolVar(&fresh, "fresh", false, "forget what was done in the demo and furnish it anew")
	if err := parse(f, args); err != nil {
		return err
	}
	host, _, err := net.SplitHostPort(listen)
	if err != nil {
		return usageError{fmt.Errorf("--listen %q is not an address like 127.0.0.1:8480", listen)}
	}
	if !loopback(host) {
		return usageError{errors.New("the demo listens on this machine only: its passphrases are printed for everybody")}
	}
	folder, err := demoFolder(data)
	if err != nil {
		return err
	}
	defer folder.leave()
	path := filepath.Join(folder.path, databaseName)
	if fresh {
		if err := removeDemo(ctx, path); err != nil {
			return err
		}
	}
	err = furnish(ctx, path, time.Now())
	if errors.Is(err, errHalfFurnished) || folder.own && errors.Is(err, errOtherDemo) {
		// A start that was killed, or the demo of another build in the folder that is the demo's alone.
		if err := removeDatabase(path); err != nil {
			return err
		}
		err = furnish(ctx, path, time.Now())
	}
	if err != nil {
		return err
	}
	store, err := db.Open(ctx, db.Config{Path: path, App: "crossplumb " + version})
	if err != nil {
		return err
	}
	defer store.Close()
	h := hosting{store: store, listen: listen, demo: true, cost: demoCost}
	return h.run(ctx, io, func(origin string) error { return welcome(io.out, origin, folder) })
}

// demoPlace is where a demo is kept.
type demoPlace struct {
	path   string
	own    bool // made by the demo for the demo, not named by anybody
	passes bool // goes when the demo ends
	leave  func()
}

// demoFolder takes the named folder; or the one that demos are kept in, so that a demo that is stopped and started again
// is the same and phones can go on; or, where another demo runs in that, a new one that goes when this one ends.
func demoFolder(named string) (demoPlace, error) {
	if named != "" {
		return lockedDemo(demoPlace{path: named})
	}
	if cache, err := os.UserCacheDir(); err == nil {
		if place, err := lockedDemo(demoPlace{path: filepath.Join(cache, "crossplumb-demo"), own: true}); err == nil {
			return place, nil
		}
	}
	path, err := os.MkdirTemp("", "crossplumb-demo-")
	if err != nil {
		return demoPlace{}, err
	}
	return lockedDemo(demoPlace{path: path, own: true, passes: true})
}

func lockedDemo(place demoPlace) (demoPlace, error) {
	if err := os.MkdirAll(place.path, 0o700); err != nil {
		return place, err
	}
	unlock, err := lockFolder(place.path)
	if err != nil {
		return place, err
	}
	place.leave = unlock
	if place.passes {
		place.leave = func() {
			unlock()
			os.RemoveAll(place.path)
		}
	}
	return place, nil
}

// errHalfFurnished is a demo whose first start was killed.
var errHalfFurnished = errors.New("the demo was not furnished to the end; start it with --fresh")

// errOtherDemo is a demo that another version of this program made. It is not furnished over without being asked: somebody
// named the folder, and may want what was done in it.
var errOtherDemo = errors.New("holds a demo made by another version of crossplumb, which this one cannot go on with; start it with --fresh to furnish it anew, or take another folder")

func otherDemo(path string) error {
	return fmt.Errorf("%s %w", filepath.Dir(path), errOtherDemo)
}

// openDemo opens the database; one that another version wrote and marked as a demo is said to be that.
func openDemo(ctx context.Context, path string, now func() time.Time) (*db.Store, error) {
	store, err := db.Open(ctx, db.Config{Path: path, Now: now, App: "crossplumb " + version})
	if errors.Is(err, db.ErrOtherText) || errors.Is(err, db.ErrNewer) {
		if marked, asked := db.DemoMark(ctx, path); asked == nil && marked != "" {
			return nil, otherDemo(path)
		}
	}
	return store, err
}

// furnish fills an empty database with the invented company, leaves one that is furnished as it is, and refuses one
// that holds anything else.
func furnish(ctx context.Context, path string, today time.Time) error {
	clock := &demoClock{at: today}
	store, err := openDemo(ctx, path, clock.now)
	if err != nil {
		return err
	}
	defer store.Close()
	state, err := store.Demo(ctx)
	switch {
	case err != nil || state == db.DemoWhole:
		return err
	case state == db.DemoBegun:
		return errHalfFurnished
	case state != "":
		return otherDemo(path)
	}
	somebody, err := store.Anybody(ctx)
	if err != nil {
		return err
	}
	if somebody {
		return notADemo(path)
	}
	// Marked first: a folder with passphrases that everybody knows says what it is, however its start ended.
	if err := store.MarkDemo(ctx, db.DemoBegun); err != nil {
		return err
	}
	if err := simulate(ctx, store, clock, demoSeed, demoCost, today); err != nil {
		return err
	}
	return store.MarkDemo(ctx, db.DemoWhole)
}

func notADemo(path string) error {
	return fmt.Errorf("%s holds people and jobs that are not the demo's; take another folder", filepath.Dir(path))
}

// removeDemo takes a demo away, and nothing that is none.
func removeDemo(ctx context.Context, path string) error {
	if _, err := os.Stat(path); errors.Is(err, os.ErrNotExist) {
		return nil
	}
	// Without opening it as this version would: the demo of another one goes as well.
	state, err := db.DemoMark(ctx, path)
	if err != nil {
		return err
	}
	if state == "" {
		return notADemo(path)
	}
	return removeDatabase(path)
}

func removeDatabase(path string) error {
	for _, suffix := range []string{"", "-wal", "-shm"} {
		if err := os.Remove(path + suffix); err != nil && !errors.Is(err, os.ErrNotExist) {
			return err
		}
	}
	return nil
}

func welcome(to io.Writer, origin string, kept demoPlace) error {
	fmt.Fprintf(to, `
This is a demo. %s on the island of %s, their people, masts and readings are all
invented; the readings were made by a simulator that knows what is wrong with which mount. It listens on this
machine only.

  desk    %s/desk
  phone   %s/        (make the window narrow, or open the phone view of your browser's tools)

Sign in as
`, demoCompany, demoIsland, origin, origin)
	for _, p := range demoPeople {
		what := p.role
		if p.crew != "" {
			what += ", " + p.crew
		}
		fmt.Fprintf(to, "  %-14s %-30q %s\n", p.name, p.passphrase, what)
	}
	where := fmt.Sprintf("The demo is kept in %s and goes on where it was; --fresh furnishes it anew.", kept.path)
	again := "stop this program, go on entering, reload the page, start it again: everything goes up by itself;"
	if kept.passes {
		where = "Another demo runs on this machine, so this one goes when it ends; --data DIR keeps it."
		again = "with --data DIR: " + again
	}
	_, err := fmt.Fprintf(to, `
Try
  on the phone as Tam Verrill: open Gannet Head, read the cautions, enter a skew of 6,2 and see what the strip says;
  %s
  at the desk as Ilse Marrow: the jobs handed in. Which one is fit to sign, which is not, and why?

%s
It computes mounts. It never says that a climb, a structure or an RF field is safe.

`, again, where)
	return err
}
