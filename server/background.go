package main

import (
	"context"
	"crypto/tls"
	"fmt"
	"net"
	"sync"
	"time"
)

// secured puts TLS on the listener when a certificate was given; it closes the
// listener when the certificate cannot be used.
func (cfg serveConfig) secured(l net.Listener) (net.Listener, error) {
	if cfg.TLSCert == "" {
		return l, nil
	}
	pair, err := tls.LoadX509KeyPair(cfg.TLSCert, cfg.TLSKey)
	if err != nil {
		l.Close()
		return nil, fmt.Errorf("the certificate or its key cannot be used: %w", err)
	}
	return tls.NewListener(l, &tls.Config{Certificates: []tls.Certificate{pair}, MinVersion: tls.VersionTLS12, NextProtos: []string{"http/1.1"}}), nil
}

// sweepEvery is how often sessions that have ended are deleted.
const sweepEvery = time.Hour

// inBackground starts what runs beside the requests: scheduled backups, the
// sweep of ended sessions, and recomputations and checks of files left
// unfinished. done is closed when all of it has stopped.
func (a *App) inBackground(cfg serveConfig) (done <-chan struct{}, stop func(), err error) {
	ctx, stop := context.WithCancel(context.Background())
	var running sync.WaitGroup
	if cfg.BackupDir != "" {
		if a.backups, err = newBackups(a.store, cfg.Log, cfg.BackupDir, cfg.BackupEvery, cfg.BackupKeep); err != nil {
			stop()
			return nil, nil, err
		}
		running.Go(func() { a.backups.run(ctx) })
	}
	running.Go(func() {
		<-ctx.Done()
		a.batches.halt()
	})
	if !cfg.ReadOnly {
		a.recomputes.resume()
		a.uploads.resume()
		running.Go(func() {
			<-ctx.Done()
			a.recomputes.halt()
			a.uploads.halt()
		})
		running.Go(func() { a.sweep(ctx) })
	}
	ended := make(chan struct{})
	go func() {
		running.Wait()
		close(ended)
	}()
	return ended, stop, nil
}

func (a *App) sweep(ctx context.Context) {
	tick := time.NewTicker(sweepEvery)
	defer tick.Stop()
	for {
		select {
		case <-ctx.Done():
			return
		case <-tick.C:
		}
		if err := a.store.SweepUploads(ctx); err != nil && ctx.Err() == nil {
			a.log.Warn("files left behind could not be swept", "err", err)
		}
		if err := a.store.CleanSessions(ctx); err != nil && ctx.Err() == nil {
			a.log.Warn("ended sessions could not be swept", "err", err)
		}
	}
}
