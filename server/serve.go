package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"log/slog"
	"net"
	"net/http"
	"os"
	"os/signal"
	"slices"
	"strings"
	"syscall"
	"time"

	"fathombend/catalogue"
	"fathombend/seed"
)

// serveConfig is what `serve` was asked for.
type serveConfig struct {
	Catalogue string    // file; "" = the demo in a temporary copy
	Listen    string    // host:port; port 0 takes a free one
	ReadOnly  bool      // no sign-in, no contribution, no writing
	DemoLaw   seed.Law  // law the demo is drawn from
	Warm      bool      // compute the opening page before anyone asks for it
	Say       io.Writer // what a person at the console reads
	Log       *slog.Logger

	TLSCert, TLSKey string        // files; "" = plain HTTP
	BehindProxy     bool          // a proxy in front does TLS and names the asker
	TrustedProxy    string        // addresses and networks of proxies; "" = usualProxies, one of them
	BackupDir       string        // "" = no scheduled backups
	BackupEvery     time.Duration // between two of them
	BackupKeep      int           // how many stay
	Timeouts        timeouts      // zero = usualTimeouts
}

const serveHelp = `Usage: fathombend serve [-catalogue FILE] [-listen ADDR] [-read-only] [-demo-law LAW]
                        [-tls-cert FILE -tls-key FILE] [-behind-proxy [-trusted-proxy LIST]]
                        [-log text|json]
                        [-backup-dir DIR] [-backup-every TIME] [-backup-keep N]

Runs the web application until it is interrupted. Without -catalogue it shows
the demo, an invented survey, from a temporary copy: nothing entered there is
kept. A new FILE starts empty.

With -backup-dir it makes a checked copy of the catalogue at intervals, while it
is in use, and keeps the newest ones. With -read-only nobody signs in, nothing is
written, and answers say how long a proxy may keep them. With -behind-proxy the
proxy in front must do TLS, pass the Host header on and set X-Forwarded-For; the
last address in it counts for throttles. With several proxies one behind the
other, -trusted-proxy names them all.

`

func runServe(args []string, in io.Reader, out, errOut io.Writer) int {
	cfg := serveConfig{Warm: true, Say: out, Log: slog.New(slog.NewTextHandler(errOut, nil))}
	law := string(seed.Both)
	fs := flag.NewFlagSet("serve", flag.ContinueOnError)
	fs.SetOutput(errOut)
	fs.StringVar(&cfg.Catalogue, "catalogue", "", "catalogue `FILE`; without it, the invented demo")
	fs.StringVar(&cfg.Listen, "listen", "localhost:8080", "`ADDR` to listen on; port 0 takes a free one")
	fs.BoolVar(&cfg.ReadOnly, "read-only", false, "show the catalogue, change nothing")
	logAs := "text"
	fs.StringVar(&logAs, "log", logAs, "how the log on the error output is written: text or json")
	fs.StringVar(&cfg.TLSCert, "tls-cert", "", "certificate `FILE` (PEM) to serve over TLS")
	fs.StringVar(&cfg.TLSKey, "tls-key", "", "its key `FILE` (PEM)")
	fs.BoolVar(&cfg.BehindProxy, "behind-proxy", false, "a proxy in front does TLS and sets X-Forwarded-For")
	fs.StringVar(&cfg.TrustedProxy, "trusted-proxy", "", "`LIST` of addresses or networks whose X-Forwarded-For is believed; without it, one proxy on this machine or a private network")
	fs.StringVar(&cfg.BackupDir, "backup-dir", "", "`FOLDER` for scheduled backups; without it, none are made")
	fs.DurationVar(&cfg.BackupEvery, "backup-every", 24*time.Hour, "`TIME` between two scheduled backups")
	fs.IntVar(&cfg.BackupKeep, "backup-keep", 14, "how many scheduled backups to keep")
	fs.StringVar(&law, "demo-law", law, "law the demo is drawn from: coriolis, supply, both or none")
	fs.Usage = func() { fmt.Fprint(errOut, serveHelp); fs.PrintDefaults() }
	if err := fs.Parse(args); errors.Is(err, flag.ErrHelp) {
		return exitOK
	} else if err != nil {
		return exitBadCall
	}
	if fs.NArg() > 0 {
		fmt.Fprintf(errOut, "serve: unexpected %q; it takes flags only\n", fs.Arg(0))
		return exitBadCall
	}
	laws := []seed.Law{seed.Coriolis, seed.Supply, seed.Both, seed.None}
	if cfg.DemoLaw = seed.Law(law); !slices.Contains(laws, cfg.DemoLaw) {
		fmt.Fprintf(errOut, "serve: -demo-law %q is not a law; expected coriolis, supply, both or none\n", law)
		return exitBadCall
	}
	if msg := cfg.badCall(logAs); msg != "" {
		fmt.Fprintln(errOut, "serve:", msg)
		return exitBadCall
	}
	if logAs == "json" {
		cfg.Log = slog.New(slog.NewJSONHandler(errOut, nil))
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	_, shut, err := startServer(ctx, cfg)
	if err != nil {
		fmt.Fprintln(errOut, "serve:", userSentence(err))
		return exitProblem
	}
	<-ctx.Done()
	fmt.Fprintln(out, "Stopping.")
	shut()
	return exitOK
}

// badCall says what is wrong with flags that parse one by one, "" if nothing is.
func (cfg serveConfig) badCall(logAs string) string {
	if cfg.TrustedProxy != "" {
		if _, err := parseProxies(cfg.TrustedProxy); err != nil {
			return "-trusted-proxy: " + err.Error()
		}
	}
	switch {
	case logAs != "text" && logAs != "json":
		return fmt.Sprintf("-log %q is not a way to log; expected text or json", logAs)
	case (cfg.TLSCert == "") != (cfg.TLSKey == ""):
		return "-tls-cert and -tls-key go together; give both or neither"
	case cfg.TrustedProxy != "" && !cfg.BehindProxy:
		return "-trusted-proxy says whom to believe with -behind-proxy; give both"
	case cfg.BackupEvery < shortestBackup:
		return fmt.Sprintf("-backup-every %s is too short; expected %s or more", cfg.BackupEvery, shortestBackup)
	case cfg.BackupKeep < 1:
		return fmt.Sprintf("-backup-keep %d would keep nothing; expected 1 or more", cfg.BackupKeep)
	case cfg.BackupDir != "" && cfg.Catalogue == "":
		return "-backup-dir needs a -catalogue; the demo is made anew at every start"
	}
	return ""
}

// userSentence keeps the operator's cause: a console reader is the operator.
func userSentence(err error) string {
	if errors.Is(err, syscall.EADDRINUSE) {
		return err.Error() + "; give another address with -listen"
	}
	return err.Error()
}

// startServer opens the catalogue of cfg, listens and serves until stop is
// called; addr is the address taken, host:port. Stop waits up to ten seconds
// for running requests and closes the catalogue.
func startServer(ctx context.Context, cfg serveConfig) (addr string, stop func(), err error) {
	if cfg.Say == nil {
		cfg.Say = io.Discard
	}
	if cfg.Log == nil {
		cfg.Log = slog.New(slog.DiscardHandler)
	}
	listener, err := net.Listen("tcp", cfg.Listen)
	if err != nil {
		return "", nil, err
	}
	if listener, err = cfg.secured(listener); err != nil {
		return "", nil, err
	}
	store, closeStore, err := openServed(ctx, cfg)
	if err != nil {
		listener.Close()
		return "", nil, err
	}
	a := newApp(store, cfg.Log, cfg.ReadOnly)
	a.behind(cfg)
	background, stopBackground, err := a.inBackground(cfg)
	if err != nil {
		listener.Close()
		closeStore()
		return "", nil, err
	}
	handler := a.handler()
	limits := cfg.Timeouts
	if limits == (timeouts{}) {
		limits = usualTimeouts
	}
	srv := &http.Server{
		Handler:           handler,
		ReadHeaderTimeout: limits.header,
		ReadTimeout:       limits.read,
		WriteTimeout:      limits.write,
		IdleTimeout:       limits.idle,
		MaxHeaderBytes:    64 << 10,
		ErrorLog:          slog.NewLogLogger(cfg.Log.Handler(), slog.LevelWarn),
	}
	served := make(chan struct{})
	go func() {
		defer close(served)
		if err := srv.Serve(listener); !errors.Is(err, http.ErrServerClosed) {
			cfg.Log.Error("serving ended", "err", err)
		}
	}()
	addr = listener.Addr().String()
	base := "http://" + shownHost(cfg.Listen, addr)
	if cfg.TLSCert != "" {
		base = "https://" + shownHost(cfg.Listen, addr)
	}
	cfg.Log.Info("listening", "address", addr, "url", base, "version", Version, "read_only", cfg.ReadOnly)
	fmt.Fprintf(cfg.Say, "Fathombend %s on %s\n", Version, base)
	for _, f := range a.onListen {
		f(base, cfg.Say)
	}
	warmed := make(chan struct{})
	go func() {
		defer close(warmed)
		if cfg.Warm {
			a.warm(context.WithoutCancel(ctx))
		}
	}()
	return addr, func() {
		ctx, cancel := context.WithTimeout(context.Background(), 10*time.Second)
		defer cancel()
		if err := srv.Shutdown(ctx); err != nil {
			srv.Close()
		}
		<-served
		<-warmed
		stopBackground()
		<-background
		closeStore()
	}, nil
}

// shownHost is the address a person can open: the host asked for with the port
// taken.
func shownHost(asked, taken string) string {
	host, _, err := net.SplitHostPort(asked)
	if err != nil || host == "" || host == "0.0.0.0" || host == "::" {
		host = "localhost"
	}
	_, port, _ := net.SplitHostPort(taken)
	return net.JoinHostPort(host, port)
}

// openServed opens the file asked for, or the demo.
func openServed(ctx context.Context, cfg serveConfig) (*catalogue.Store, func(), error) {
	if strings.TrimSpace(cfg.Catalogue) != "" {
		s, err := catalogue.Open(ctx, cfg.Catalogue, openOptions(cfg.ReadOnly))
		if err != nil {
			return nil, nil, err
		}
		return s, func() { s.Close() }, nil
	}
	law := cfg.DemoLaw
	if law == "" {
		law = seed.Both
	}
	s, cleanup, err := openDemo(ctx, law)
	if err != nil {
		return nil, nil, err
	}
	fmt.Fprintf(cfg.Say, "No -catalogue given: this is the demo (law: %s). Every system in it is invented, and nothing entered is kept when the program stops.\n", law)
	return s, cleanup, nil
}
