package main

import (
	"crypto/tls"
	"fmt"
	"os"
	"sync"
	"time"
)

// watchedCertificate gives a certificate that is read again when its file changed: certificates are renewed every few
// weeks, and a restart for it would fall into somebody's climb. A renewal that cannot be read leaves the old one.
func watchedCertificate(certFile, keyFile string) (*tls.Config, error) {
	w := &certificateFile{cert: certFile, key: keyFile}
	if err := w.load(); err != nil {
		return nil, fmt.Errorf("certificate: %w", err)
	}
	return &tls.Config{MinVersion: tls.VersionTLS12, GetCertificate: w.get, NextProtos: []string{"http/1.1"}}, nil
}

type certificateFile struct {
	cert, key string

	mu      sync.Mutex
	loaded  *tls.Certificate
	changed time.Time
	looked  time.Time
}

func (w *certificateFile) get(*tls.ClientHelloInfo) (*tls.Certificate, error) {
	w.mu.Lock()
	defer w.mu.Unlock()
	if time.Since(w.looked) >= lookAgainEvery {
		w.looked = time.Now()
		if info, err := os.Stat(w.cert); err == nil && !info.ModTime().Equal(w.changed) {
			// On an error the old certificate still stands, and the next look tries again.
			_ = w.load()
		}
	}
	return w.loaded, nil
}

func (w *certificateFile) load() error {
	info, err := os.Stat(w.cert)
	if err != nil {
		return err
	}
	pair, err := tls.LoadX509KeyPair(w.cert, w.key)
	if err != nil {
		return err
	}
	w.loaded, w.changed, w.looked = &pair, info.ModTime(), time.Now()
	return nil
}
