// Package server speaks HTTP: it reads requests, asks db and calc/wire, and writes answers. It holds no state of its
// own beyond a limit on how many passphrases are hashed at once.
//
// What never happens here:
//
//   - a handler keeps or passes on a *fiber.Ctx, or text of a request without copying it (Fiber uses the memory again;
//     Immutable is set besides);
//   - a compressed request is opened (its size limit would not hold);
//   - an error's own text reaches a client, unless it was written for one;
//   - a missing file is answered with a page;
//   - a formula stands here.
package server

import (
	"context"
	"errors"
	"log/slog"
	"net"
	"sync"
	"time"

	"github.com/gofiber/fiber/v2"

	"crossplumb/db"
	"crossplumb/static"
)

// Pages is where the built pages come from; *static.Files is one.
type Pages interface {
	Get(urlPath string) (*static.File, bool)
}

// Config names everything that a Server depends on.
type Config struct {
	Store *db.Store
	Pages Pages
	Log   *slog.Logger
	// Secure says that browsers reach this server by https, directly or through a proxy: cookies are then bound to it.
	Secure bool
	// Origin is the address that people use, like https://mast.example.org; "" takes it from each request.
	Origin string
	// Proxies are the addresses of proxies whose word about the client's address and protocol counts; empty = none.
	Proxies []string
	// Passphrases says how expensive a guess is; the zero value is PassphraseCost.
	Passphrases HashCost
	// Patience bounds each use of the database; 0 = 10 s.
	Patience time.Duration
	// Demo is said by /healthz, so that nobody takes invented readings for true ones.
	Demo bool
}

// Server is the HTTP side.
type Server struct {
	cfg     Config
	app     *fiber.App
	root    context.Context
	stop    context.CancelFunc
	hashing chan struct{}
	dummy   string
	openAPI []byte
	judge   judge
	beside  sync.WaitGroup // what runs beside the requests and is short
}

// The limits of one request. Entries come in batches of 256 KiB at most, a plan with its sheets likewise; a calculation
// may carry sampled antenna patterns.
const (
	maxBody      = 2 << 20
	maxAPIBody   = 256 << 10
	maxCalcBody  = 1 << 20
	maxHeader    = 16 << 10
	maxConns     = 4096
	readTimeout  = 30 * time.Second // a batch over a cell's edge at 100 kbit/s takes 20 s
	writeTimeout = 3 * time.Minute  // the phone page with its wasm, 1.2 MB at most, takes 96 s at the same rate
	idleTimeout  = 75 * time.Second
)

// New builds the server. It does not listen yet.
func New(cfg Config) (*Server, error) {
	if cfg.Store == nil || cfg.Pages == nil || cfg.Log == nil {
		return nil, errors.New("server: Store, Pages and Log are needed")
	}
	if cfg.Patience == 0 {
		cfg.Patience = 10 * time.Second
	}
	if cfg.Passphrases == (HashCost{}) {
		cfg.Passphrases = PassphraseCost
	}
	s := &Server{cfg: cfg, hashing: make(chan struct{}, hashesAtOnce)}
	s.root, s.stop = context.WithCancel(context.Background())
	var err error
	if s.dummy, err = cfg.Passphrases.dummy(); err != nil {
		return nil, err
	}
	if s.openAPI, err = describe(openAPI); err != nil {
		return nil, err
	}
	s.app = fiber.New(fiber.Config{
		AppName:   "crossplumb",
		Immutable: true, // without it texts of a request change under whoever keeps them
		// /Jobs and /jobs/ are not /jobs: one spelling each, or rules about paths have holes.
		CaseSensitive:           true,
		StrictRouting:           true,
		BodyLimit:               maxBody,
		ReadBufferSize:          maxHeader,
		Concurrency:             maxConns,
		ReadTimeout:             readTimeout, // also what lets a shutdown end while browsers hold silent connections
		WriteTimeout:            writeTimeout,
		IdleTimeout:             idleTimeout,
		DisableStartupMessage:   true,
		EnableIPValidation:      true,
		EnableTrustedProxyCheck: true, // with no proxies named, nobody's forwarded headers count
		TrustedProxies:          cfg.Proxies,
		ProxyHeader:             proxyHeader(cfg.Proxies),
		ErrorHandler:            s.writeError,
	})
	s.judge = judge{server: s, wake: make(chan struct{}, 1), done: make(chan struct{})}
	s.routes()
	return s, nil
}

func proxyHeader(proxies []string) string {
	if len(proxies) == 0 {
		return ""
	}
	return fiber.HeaderXForwardedFor
}

// Serve answers on the listener until Shutdown. It returns nil after one.
func (s *Server) Serve(ln net.Listener) error {
	go s.judge.run()
	return s.app.Listener(ln)
}

// shutdownPatience is how long requests in flight may take to end. Whoever stops the process waits ten seconds.
const shutdownPatience = 6 * time.Second

// Shutdown stops listening, lets requests in flight end, then stops what runs beside them. Close the store afterwards.
func (s *Server) Shutdown() error {
	err := s.app.ShutdownWithTimeout(shutdownPatience)
	s.beside.Wait()
	s.stop()
	s.judge.wait()
	if errors.Is(err, context.DeadlineExceeded) {
		// Silent connections that browsers hold open; nothing was cut that had begun to be answered.
		return nil
	}
	return err
}

// patience is the context of one use of the database. It hangs on the server, not on the client: Fiber does not tell
// when a client leaves, and an upload that was begun is better finished.
func (s *Server) patience() (context.Context, context.CancelFunc) {
	return context.WithTimeout(s.root, s.cfg.Patience)
}
