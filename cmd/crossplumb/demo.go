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
	f := flags("demo", io)
	f.StringVar(&listen, "listen", "127.0.0.1:8480", "address on this machine to listen on")
	f.StringVar(&data, "data", "", "folder to keep the demo in; without it a new one that goes when the demo ends")
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
	if data == "" {
		if data, err = os.MkdirTemp("", "crossplumb-demo-"); err != nil {
			return err
		}
		defer os.RemoveAll(data)
	} else if err := os.MkdirAll(data, 0o700); err != nil {
		return err
	}
	unlock, err := lockFolder(data)
	if err != nil {
		return err
	}
	defer unlock()
	path := filepath.Join(data, databaseName)
	if err := furnish(ctx, path, time.Now()); err != nil {
		return err
	}
	store, err := db.Open(ctx, db.Config{Path: path, App: "crossplumb " + version})
	if err != nil {
		return err
	}
	defer store.Close()
	h := hosting{store: store, listen: listen, demo: true, cost: demoCost}
	return h.run(ctx, io, func(origin string) error { return welcome(io.out, origin) })
}

// furnish fills an empty database with the invented company, leaves one that is furnished as it is, and refuses one
// that holds anything else.
func furnish(ctx context.Context, path string, today time.Time) error {
	clock := &demoClock{at: today}
	store, err := db.Open(ctx, db.Config{Path: path, Now: clock.now, App: "crossplumb " + version})
	if err != nil {
		return err
	}
	defer store.Close()
	furnished, err := store.IsDemo(ctx)
	if err != nil || furnished {
		return err
	}
	somebody, err := store.Anybody(ctx)
	if err != nil {
		return err
	}
	if somebody {
		return fmt.Errorf("%s holds people and jobs that are not the demo's; take another folder", filepath.Dir(path))
	}
	// Marked first: a start that was killed half way leaves a folder that says what it is, and is not taken for real.
	if err := store.MarkDemo(ctx); err != nil {
		return err
	}
	return simulate(ctx, store, clock, demoSeed, demoCost, today)
}

func welcome(to io.Writer, origin string) error {
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
	_, err := fmt.Fprint(to, `
Try
  on the phone as Tam Verrill: open Gannet Head, read the cautions, enter a skew of 6,2 and see what the strip says;
  stop this program, go on entering, reload the page, start it again with the same --data: everything goes up by itself;
  at the desk as Ilse Marrow: the jobs handed in. Which one is fit to sign, which is not, and why?

It computes mounts. It never says that a climb, a structure or an RF field is safe.

`)
	return err
}
