package main

import (
	"context"
	"crypto/tls"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"net"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"time"

	"crossplumb/db"
	"crossplumb/server"
	"crossplumb/static"
)

const databaseName = "crossplumb.db"

// serveConfig is the command line of serve, read.
type serveConfig struct {
	listen  string
	data    string
	tlsCert string
	tlsKey  string
	proxies []string
	origin  string
	verbose bool
}

func parseServe(args []string, io streams) (serveConfig, error) {
	var cfg serveConfig
	var proxy string
	f := flags("serve", io)
	f.StringVar(&cfg.listen, "listen", "127.0.0.1:8480", "address to listen on")
	f.StringVar(&cfg.data, "data", "", "folder of the database, on a local disk")
	f.StringVar(&cfg.tlsCert, "tls-cert", "", "certificate chain in PEM; read again when the file changes")
	f.StringVar(&cfg.tlsKey, "tls-key", "", "its key in PEM")
	f.StringVar(&proxy, "proxy", "", "addresses of the https proxy in front, comma between; its word about clients counts")
	f.StringVar(&cfg.origin, "origin", "", "what people type to come here, like https://mast.example.org")
	f.BoolVar(&cfg.verbose, "verbose", false, "a line of log for each request")
	if err := parse(f, args); err != nil {
		return cfg, err
	}
	if err := fromEnvironment(f); err != nil {
		return cfg, err
	}
	if proxy != "" {
		cfg.proxies = strings.Split(proxy, ",")
	}
	return cfg, cfg.check()
}

func (cfg serveConfig) check() error {
	host, _, err := net.SplitHostPort(cfg.listen)
	switch {
	case err != nil:
		return usageError{fmt.Errorf("--listen %q is not an address like 127.0.0.1:8480", cfg.listen)}
	case cfg.data == "":
		return usageError{errors.New("--data says where the database lies")}
	case (cfg.tlsCert == "") != (cfg.tlsKey == ""):
		return usageError{errors.New("--tls-cert and --tls-key come together")}
	case cfg.tlsCert != "" && len(cfg.proxies) > 0:
		return usageError{errors.New("either the proxy speaks https or this program does")}
	case !cfg.https() && !loopback(host):
		// Phones give sensors, storage and a service worker to secure pages only, and the session would be readable.
		return usageError{errors.New("beyond this machine phones need https: give --tls-cert and --tls-key, or --proxy")}
	}
	if cfg.origin != "" {
		if u, err := url.Parse(cfg.origin); err != nil || u.Scheme != "https" && u.Scheme != "http" || u.Host == "" || u.Path != "" {
			return usageError{fmt.Errorf("--origin %q is not an address like https://mast.example.org", cfg.origin)}
		}
	}
	return nil
}

func (cfg serveConfig) https() bool { return cfg.tlsCert != "" || len(cfg.proxies) > 0 }

func loopback(host string) bool {
	if host == "localhost" {
		return true
	}
	ip := net.ParseIP(host)
	return ip != nil && ip.IsLoopback()
}

func runServe(ctx context.Context, args []string, io streams) error {
	cfg, err := parseServe(args, io)
	if err != nil {
		return err
	}
	if err := os.MkdirAll(cfg.data, 0o700); err != nil {
		return err
	}
	unlock, err := lockFolder(cfg.data)
	if err != nil {
		return err
	}
	defer unlock()
	store, err := db.Open(ctx, db.Config{Path: filepath.Join(cfg.data, databaseName), App: "crossplumb " + version})
	if err != nil {
		return err
	}
	defer store.Close()
	demo, err := store.Demo(ctx)
	if err != nil {
		return err
	}
	if demo != "" {
		return fmt.Errorf("%s holds the demo, with passphrases that everybody knows; take another folder", cfg.data)
	}
	h := hosting{store: store, listen: cfg.listen, https: cfg.https(), proxies: cfg.proxies, origin: cfg.origin, verbose: cfg.verbose}
	if cfg.tlsCert != "" {
		if h.tls, err = watchedCertificate(cfg.tlsCert, cfg.tlsKey); err != nil {
			return err
		}
	}
	return h.run(ctx, io, func(origin string) error { return inviteFirst(ctx, store, origin, io.out) })
}

// inviteFirst prints the one way into an empty database. There is no passphrase to begin with.
func inviteFirst(ctx context.Context, store *db.Store, origin string, to io.Writer) error {
	somebody, err := store.Anybody(ctx)
	if err != nil || somebody {
		return err
	}
	token, until, err := store.InviteFirst(ctx)
	if err != nil {
		return err
	}
	fmt.Fprintf(to, "nobody can sign in yet; this link makes the first supervisor, once, until %s:\n  %s\n",
		until.Local().Format("2006-01-02 15:04"), server.InvitationLink(origin, db.Supervisor, token))
	return nil
}

// hosting is a server on a listener until the context ends.
type hosting struct {
	store   *db.Store
	listen  string
	tls     *tls.Config
	https   bool
	proxies []string
	origin  string
	verbose bool
	demo    bool
	cost    server.HashCost
}

// run listens, says where, and answers until ctx ends; then requests in flight may end, and the caller closes the store.
func (h hosting) run(ctx context.Context, io streams, ready func(origin string) error) error {
	level := slog.LevelInfo
	if h.verbose {
		level = slog.LevelDebug
	}
	log := slog.New(slog.NewJSONHandler(io.err, &slog.HandlerOptions{Level: level}))
	pages, err := static.Load()
	if err != nil {
		return err
	}
	if !pages.Built() {
		log.Warn("the pages are not in this program; make build puts them in")
	}
	srv, err := server.New(server.Config{Store: h.store, Pages: pages, Log: log, Secure: h.https, Origin: h.origin,
		Proxies: h.proxies, Passphrases: h.cost, Demo: h.demo})
	if err != nil {
		return err
	}
	ln, err := net.Listen("tcp", h.listen)
	if err != nil {
		return err
	}
	origin := h.origin
	if origin == "" {
		origin = originOf(ln.Addr(), h.https)
	}
	if h.tls != nil {
		ln = tls.NewListener(ln, h.tls)
	}
	if err := ready(origin); err != nil {
		ln.Close()
		return err
	}
	fmt.Fprintf(io.out, "listening on %s\n", origin)
	served := make(chan error, 1)
	go func() { served <- srv.Serve(ln) }()
	select {
	case err := <-served:
		return fmt.Errorf("stopped listening: %w", err)
	case <-ctx.Done():
	}
	log.Info("stopping")
	return srv.Shutdown()
}

func originOf(addr net.Addr, https bool) string {
	scheme := "http"
	if https {
		scheme = "https"
	}
	return scheme + "://" + addr.String()
}

// lookAgainEvery is how often the certificate's files are looked at.
const lookAgainEvery = 30 * time.Second
