package main

import (
	"bytes"
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	"encoding/json"
	"encoding/pem"
	"io"
	"log/slog"
	"math/big"
	"net"
	"net/http"
	"net/http/cookiejar"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"fathombend/catalogue"
)

// logBuffer collects a log that several goroutines write.
type logBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *logBuffer) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *logBuffer) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

// Targets are confidential and nobody is followed: neither queries, forms,
// addresses that no route takes nor askers stand in the log.
func TestLogTellsNothingConfidential(t *testing.T) {
	var log logBuffer
	s := &site{t: t, file: filepath.Join(t.TempDir(), "c.db")}
	s.start(serveConfig{Catalogue: s.file, Log: slog.New(slog.NewJSONHandler(&log, nil))})
	s.person("ann", "keeper")
	v := s.as("ann")
	v.get("/expectation?palaeolatitude=41.4242&age=70.7171")
	v.post("/expectation", url.Values{"palaeolatitude": {"41.4242"}, "age": {"70.7171"}})
	v.get("/expectation%3Fpalaeolatitude=41.4242")
	v.get("/systems?q=secretbasin")
	v.get("/systems?nope=secretbasin")
	a := v.get("/nothing/secretbasin").is(http.StatusNotFound)
	text := log.String()
	for _, secret := range []string{"41.4242", "70.7171", "secretbasin", testPassword, "127.0.0.1:", "\"ann\"", "Mozilla", "Go-http-client"} {
		for line := range strings.Lines(text) {
			if strings.Contains(line, secret) && !strings.Contains(line, `"msg":"listening"`) {
				t.Errorf("the log holds %q: %s", secret, line)
			}
		}
	}
	id := a.header.Get("X-Request-Id")
	found := false
	for line := range strings.Lines(text) {
		var entry map[string]any
		if err := json.Unmarshal([]byte(line), &entry); err != nil {
			t.Fatalf("a line of the log is no JSON: %s", line)
		}
		found = found || entry["request_id"] == id && entry["status"] == 404.0 && entry["route"] == noRoute
	}
	if id == "" || !found {
		t.Errorf("no line for request %q", id)
	}
	if !strings.Contains(a.body, id) {
		t.Error("the error page does not show its request id")
	}
}

func TestMetricsHealthAndStatus(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	s.person("cy", "curator")
	v := s.as("kit")
	v.get("/systems?q=secretbasin").is(http.StatusOK)
	v.get("/no/such/secretbasin").is(http.StatusNotFound)
	m := s.visitor().get("/metrics").is(http.StatusOK)
	for _, want := range []string{
		`fathombend_requests_total{method="GET",route="/systems",status="200"} 1`,
		`fathombend_requests_total{method="GET",route="(none)",status="404"} 1`,
		`fathombend_request_seconds_bucket{route="/systems",le="0.25"}`,
		"fathombend_catalogue_up 1", "fathombend_submissions_waiting 0", `fathombend_catalogue_bytes{part="file"}`, "go_goroutines", "process_resident_memory_bytes",
	} {
		if !strings.Contains(m.body, want) {
			t.Errorf("the metrics lack %s", want)
		}
	}
	if strings.Contains(m.body, "secretbasin") {
		t.Error("the metrics hold an address")
	}
	v.get("/status").is(http.StatusOK).says("The catalogue answers", "schema", "none scheduled", "/systems")
	s.as("cy").get("/status").is(http.StatusForbidden)
	if a := s.visitor().get("/status"); a.url.Path != "/sign-in" {
		t.Errorf("signed out, /status leads to %s", a.url.Path)
	}
	if h := s.visitor().get("/healthz").is(http.StatusOK); h.header.Get("Cache-Control") != "no-store" {
		t.Error("the health may be kept by a proxy")
	}
	if err := os.Rename(s.file, s.file+".away"); err != nil {
		t.Fatal(err)
	}
	s.visitor().get("/healthz").is(http.StatusServiceUnavailable).says("cannot be opened")
	if !strings.Contains(s.visitor().get("/metrics").body, "fathombend_catalogue_up 0") {
		t.Error("the metrics do not tell that the file is away")
	}
	if err := os.Rename(s.file+".away", s.file); err != nil {
		t.Fatal(err)
	}
	s.visitor().get("/healthz").is(http.StatusOK)
}

// getTagged asks with the tag held; "" asks afresh.
func (v *visitor) getTagged(path, tag string) *answer {
	r, err := http.NewRequest("GET", v.base+path, nil)
	if err != nil {
		v.t.Fatal(err)
	}
	if tag != "" {
		r.Header.Set("If-None-Match", tag)
	}
	return v.do(r)
}

// A read-only server on a copy lets proxies keep its pages, and says by the tag
// when there is something new.
func TestReadOnlyAnswersAreCacheable(t *testing.T) {
	file := filepath.Join(t.TempDir(), "c.db")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "t.csv", goodCSV))
	ro := &site{t: t}
	ro.start(serveConfig{Catalogue: file, ReadOnly: true})
	v := ro.visitor()
	tags := map[string]bool{}
	for _, p := range []string{"/", "/systems", "/systems?q=loom", "/systems.csv", "/systems.json", "/systems/loom-channel", "/methods", "/changes"} {
		a := v.get(p).is(http.StatusOK)
		tag, rule := a.header.Get("ETag"), a.header.Get("Cache-Control")
		if tag == "" || tags[tag] || !strings.HasPrefix(rule, "public, max-age=") || !strings.Contains(rule, "s-maxage=") {
			t.Errorf("%s: tag %q, %q", p, tag, rule)
		}
		tags[tag] = true
		if strings.Contains(a.header.Get("Vary"), "Cookie") || a.header.Get("Set-Cookie") != "" {
			t.Errorf("%s depends on cookies: a proxy cannot share it", p)
		}
		if again := v.getTagged(p, tag); again.status != http.StatusNotModified || again.body != "" || again.header.Get("ETag") != tag {
			t.Errorf("%s asked with its tag: %d", p, again.status)
		}
	}
	for _, p := range []string{"/systems?lat_min=91", "/nothing", "/contribute", "/healthz", "/metrics"} {
		if a := v.get(p); a.header.Get("ETag") != "" || strings.Contains(a.header.Get("Cache-Control"), "public") {
			t.Errorf("%s (%d) may be kept: %v", p, a.status, a.header)
		}
	}
	old := v.get("/systems").header.Get("ETag")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "more.csv", strings.ReplaceAll(goodCSV, "Weft", "Heddle")))
	if a := v.getTagged("/systems", old).is(http.StatusOK); a.header.Get("ETag") == old {
		t.Error("the tag stayed though the catalogue changed")
	}
}

func TestTagsOfAServerThatTakesChanges(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	a := s.visitor().get("/systems").is(http.StatusOK)
	if a.header.Get("Cache-Control") != "private, no-cache" || a.header.Get("ETag") == "" {
		t.Errorf("signed out: %v", a.header)
	}
	v := s.as("ann")
	if in := v.getTagged("/systems", a.header.Get("ETag")).is(http.StatusOK); in.header.Get("ETag") != "" || !strings.Contains(in.body, "Sign out") {
		t.Errorf("signed in: %v", in.header)
	}
}

// certificate makes one for localhost, signed by itself.
func certificate(t *testing.T) (cert, key string, pool *x509.CertPool) {
	t.Helper()
	private, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	c := &x509.Certificate{SerialNumber: big.NewInt(1), Subject: pkix.Name{CommonName: "localhost"}, NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour),
		IPAddresses: []net.IP{net.IPv4(127, 0, 0, 1)}, IsCA: true, BasicConstraintsValid: true}
	der, err := x509.CreateCertificate(rand.Reader, c, c, &private.PublicKey, private)
	if err != nil {
		t.Fatal(err)
	}
	kder, err := x509.MarshalPKCS8PrivateKey(private)
	if err != nil {
		t.Fatal(err)
	}
	pool = x509.NewCertPool()
	pool.AppendCertsFromPEM(pem.EncodeToMemory(&pem.Block{Type: "CERTIFICATE", Bytes: der}))
	return tempFile(t, "cert.pem", string(pem.EncodeToMemory(&pem.Block{Type: "CERTIFICATE", Bytes: der}))),
		tempFile(t, "key.pem", string(pem.EncodeToMemory(&pem.Block{Type: "PRIVATE KEY", Bytes: kder}))), pool
}

func TestCookieOverTLS(t *testing.T) {
	cert, key, pool := certificate(t)
	s := &site{t: t, file: filepath.Join(t.TempDir(), "c.db")}
	s.start(serveConfig{Catalogue: s.file, TLSCert: cert, TLSKey: key})
	s.person("ann", "contributor")
	if !strings.Contains(s.said.String(), "https://") {
		t.Errorf("the console names %s", s.said.String())
	}
	s.base = strings.Replace(s.base, "http://", "https://", 1)
	jar, _ := cookiejar.New(nil)
	v := &visitor{s, &http.Client{Jar: jar, Transport: &http.Transport{TLSClientConfig: &tls.Config{RootCAs: pool}},
		CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}}
	a := v.post("/sign-in", url.Values{"name": {"ann"}, "password": {testPassword}}).is(http.StatusSeeOther)
	mustBeHostCookie(t, a)
	if a.header.Get("Strict-Transport-Security") == "" {
		t.Error("no Strict-Transport-Security over TLS")
	}
	v.get("/account").is(http.StatusOK).says("ann")
}

// mustBeHostCookie: the __Host- prefix binds a cookie to this host, to TLS and
// to the whole site (RFC 6265bis, section 4.1.3.2).
func mustBeHostCookie(t *testing.T, a *answer) {
	t.Helper()
	c := a.header.Get("Set-Cookie")
	for _, want := range []string{"__Host-", "Path=/", "Secure", "HttpOnly", "SameSite=Lax"} {
		if !strings.Contains(c, want) {
			t.Errorf("cookie %q lacks %s", c, want)
		}
	}
	if strings.Contains(c, "Domain=") {
		t.Errorf("cookie %q names a domain", c)
	}
}

func TestBehindAProxy(t *testing.T) {
	s := &site{t: t, file: filepath.Join(t.TempDir(), "c.db")}
	s.start(serveConfig{Catalogue: s.file, BehindProxy: true})
	s.person("ann", "contributor")
	v := s.visitor()
	v.client.CheckRedirect = func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }
	try := func(from, password string) *answer {
		r, _ := http.NewRequest("POST", v.base+"/sign-in", strings.NewReader(url.Values{"name": {"ann"}, "password": {password}}.Encode()))
		r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
		r.Header.Set("X-Forwarded-For", from)
		return v.do(r)
	}
	mustBeHostCookie(t, try("203.0.113.9", testPassword).is(http.StatusSeeOther))
	// Ten failures lock out their own address, whatever stands before it in the
	// header, and nobody else's.
	for i := range 10 {
		try("10.0.0."+string(rune('0'+i))+", 198.51.100.7", "wrong password")
	}
	try("192.0.2.1, 198.51.100.7", testPassword).is(http.StatusTooManyRequests)
	try("203.0.113.10", testPassword).is(http.StatusSeeOther)
}

func TestScheduledBackups(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "copies")
	file := filepath.Join(t.TempDir(), "c.db")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "t.csv", goodCSV))
	s := &site{t: t, file: file}
	s.start(serveConfig{Catalogue: file, BackupDir: dir, BackupEvery: time.Hour, BackupKeep: 3})
	var made []string
	for range 200 { // the first is due at once
		if made, _ = filepath.Glob(filepath.Join(dir, "*.db"+catalogue.ChecksumSuffix)); len(made) == 1 {
			break
		}
		time.Sleep(20 * time.Millisecond)
	}
	if len(made) != 1 {
		t.Fatal("no backup was made at the start")
	}
	copied := strings.TrimSuffix(made[0], catalogue.ChecksumSuffix)
	back := filepath.Join(t.TempDir(), "back.db")
	mustRun(t, "", "restore", copied, back)
	if a, b := mustRun(t, "", "export", "-catalogue", file), mustRun(t, "", "export", "-catalogue", back); a != b {
		t.Error("the restored catalogue differs")
	}
}

func TestBackupRotation(t *testing.T) {
	dir := t.TempDir()
	store, err := catalogue.Open(t.Context(), filepath.Join(t.TempDir(), "c.db"), catalogue.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	b, err := newBackups(store, slog.New(slog.NewTextHandler(io.Discard, nil)), dir, time.Hour, 3)
	if err != nil {
		t.Fatal(err)
	}
	other := filepath.Join(dir, "fathombend-mine.db")
	if err := os.WriteFile(other, []byte("x"), 0o600); err != nil {
		t.Fatal(err)
	}
	at := time.Date(2031, 5, 1, 0, 0, 0, 0, time.UTC)
	b.now = func() time.Time { return at }
	for range 6 {
		if b.wait() != 0 {
			t.Errorf("%s: waits %s for a copy that is due", at, b.wait())
		}
		b.once(t.Context())
		if s := b.state(); s.Problem != "" || !s.Last.Equal(at) {
			t.Fatalf("%+v", s)
		}
		if b.wait() != time.Hour {
			t.Errorf("waits %s, want an hour", b.wait())
		}
		at = at.Add(time.Hour)
	}
	held, _ := filepath.Glob(filepath.Join(dir, "*"))
	if len(held) != 3*2+1 {
		t.Errorf("the folder holds %v", held)
	}
	if _, err := os.Stat(filepath.Join(dir, "fathombend-20310501T050000Z.db")); err != nil {
		t.Error("the newest copy is gone")
	}
	// A folder that went missing is told, tried again soon, and mended by itself.
	if err := os.RemoveAll(dir); err != nil {
		t.Fatal(err)
	}
	b.once(t.Context())
	if s := b.state(); s.Failures != 1 || !strings.Contains(s.Problem, "cannot be written") || b.wait() != backupRetry {
		t.Errorf("missing folder: %+v, waits %s", s, b.wait())
	}
	if err := os.Mkdir(dir, 0o700); err != nil {
		t.Fatal(err)
	}
	b.once(t.Context())
	if s := b.state(); s.Problem != "" {
		t.Errorf("after it was put right: %+v", s)
	}
}

func TestServeRefusesBadOperation(t *testing.T) {
	for _, args := range [][]string{
		{"-log", "xml"}, {"-tls-cert", "x.pem"}, {"-backup-dir", "d"}, {"-catalogue", "x.db", "-backup-dir", "d", "-backup-every", "1s"},
		{"-catalogue", "x.db", "-backup-dir", "d", "-backup-keep", "0"},
	} {
		if code, _, said := runCommand("", append([]string{"serve"}, args...)...); code != exitBadCall || said == "" {
			t.Errorf("%v: exit %d, %q", args, code, said)
		}
	}
	for _, args := range [][]string{{"-tls-cert", "none.pem", "-tls-key", "none.pem"}, {"-catalogue", filepath.Join(t.TempDir(), "no", "c.db")}} {
		if code, _, said := runCommand("", append([]string{"serve", "-listen", "127.0.0.1:0"}, args...)...); code != exitProblem || said == "" {
			t.Errorf("%v: exit %d, %q", args, code, said)
		}
	}
}

func TestChangesPage(t *testing.T) {
	s := newSite(t)
	s.visitor().get("/changes").is(http.StatusOK).says("Changes", Version, "make a backup before you start a newer version")
}
