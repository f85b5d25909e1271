package main

import (
	"bufio"
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"mime/multipart"
	"net"
	"net/http"
	"net/url"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// raw sends bytes as they are and reads what comes back until the other side
// closes or the deadline passes.
func raw(t *testing.T, base, text string, wait time.Duration) (answer string, closed bool) {
	t.Helper()
	conn, err := net.Dial("tcp", strings.TrimPrefix(base, "http://"))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close()
	if _, err := io.WriteString(conn, text); err != nil {
		t.Fatal(err)
	}
	_ = conn.SetReadDeadline(time.Now().Add(wait))
	b, err := io.ReadAll(conn)
	return string(b), err == nil
}

// quiet is the answer to something hostile: refused or harmless, never a fault.
func quiet(t *testing.T, what string, a *answer) {
	t.Helper()
	if a.status >= 500 {
		t.Errorf("%s: status %d\n%s", what, a.status, a.text())
	}
}

func TestPathTraversal(t *testing.T) {
	s := newDemoSite(t)
	for _, p := range []string{
		"/static/../go.mod", "/static/..%2fgo.mod", "/static/%2e%2e/%2e%2e/etc/passwd", "/static/....//go.mod", "/static//etc/passwd",
		"/systems/..%2f..%2fetc%2fpasswd", "/systems/../../etc/passwd", "/figures/..%2fx.svg", "/static/%00", "/static/fathombend.css%00.txt", "/static/..\\go.mod",
	} {
		text, _ := raw(t, s.base, "GET "+p+" HTTP/1.1\r\nHost: x\r\nConnection: close\r\n\r\n", 5*time.Second)
		status := strings.SplitN(text, "\r\n", 2)[0]
		if !strings.Contains(status, " 404 ") && !strings.Contains(status, " 400 ") && !strings.Contains(status, " 301 ") {
			t.Errorf("%s: %s", p, status)
		}
		for _, leak := range []string{"root:", "module fathombend", "package static"} {
			if strings.Contains(text, leak) {
				t.Errorf("%s gives away a file", p)
			}
		}
	}
}

// No value of a request reaches a header as a line of its own, and nothing
// leads to another site.
func TestHeaderInjection(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	for _, back := range []string{"/account\r\nX-Evil: 1", "/\r\nSet-Cookie: a=b", "//evil.example", "https://evil.example/", "/\\evil.example", "javascript:alert(1)", "/%0d%0aX-Evil:1"} {
		v := s.visitor()
		v.client.CheckRedirect = func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }
		a := v.post("/sign-in", url.Values{"name": {"ann"}, "password": {testPassword}, "return": {back}})
		to := a.header.Get("Location")
		if a.status != http.StatusSeeOther || !strings.HasPrefix(to, "/") || strings.HasPrefix(to, "//") || strings.HasPrefix(to, "/\\") || a.header.Get("X-Evil") != "" || len(a.header.Values("Set-Cookie")) != 1 {
			t.Errorf("return %q: %d, Location %q, %v", back, a.status, to, a.header)
		}
	}
	v := s.visitor()
	for _, p := range []string{"/systems?q=%0d%0aX-Evil:1", "/systems?sort=%0d%0aX-Evil:1", "/regression?seed=1%0d%0aX-Evil:1", "/systems.csv?q=%22%0d%0aX-Evil:1"} {
		a := v.get(p)
		quiet(t, p, a)
		if a.header.Get("X-Evil") != "" {
			t.Errorf("%s sets a header", p)
		}
	}
	// Two lengths, or a length and chunks, are how requests are smuggled.
	for _, r := range []string{
		"POST /sign-in HTTP/1.1\r\nHost: x\r\nContent-Length: 5\r\nContent-Length: 6\r\n\r\nabcdef",
		"GET / HTTP/1.1\r\nHost: x\r\nX: a\nb\r\nHost: y\r\n\r\n", "GET / HTTP/1.1\r\n\r\n", "GET / HTTP/1.1\r\nHost: x\r\nTransfer-Encoding: gzip, chunked\r\n\r\n",
	} {
		text, _ := raw(t, s.base, r, 5*time.Second)
		if !strings.HasPrefix(text, "HTTP/1.1 4") && !strings.HasPrefix(text, "HTTP/1.1 501") {
			t.Errorf("%q: %.60s", r, text)
		}
	}
}

func TestHugeQueriesAndManyValues(t *testing.T) {
	s := newDemoSite(t)
	v := s.visitor()
	many := func(name, value string, n int) string {
		return strings.TrimSuffix(strings.Repeat(name+"="+value+"&", n), "&")
	}
	for what, q := range map[string]string{
		"3,000 values of one filter": many("kind", "river", 3000), "10,000 empty ones": many("a", "", 10_000), "one long text": "q=" + strings.Repeat("x", 40_000),
		"an endless query": "q=" + strings.Repeat("x", 200_000), "many names": strings.Repeat("a&", 20_000), "nested escapes": "q=" + strings.Repeat("%25", 10_000),
	} {
		for _, p := range []string{"/systems", "/systems.json", "/regression", "/expectation", "/"} {
			a := v.get(p + "?" + q)
			if a.status != http.StatusBadRequest && a.status != http.StatusRequestHeaderFieldsTooLarge && a.status != http.StatusOK {
				t.Errorf("%s at %s: %d", what, p, a.status)
			}
		}
	}
	// In a body there is room for all ten thousand.
	for _, body := range []string{many("kind", "river", 10_000), many("basin", "none", 10_000), many("setting", "fan", 10_000) + "&" + many("source", "x", 10_000), many("model", "linear:coriolis", 10_000)} {
		for _, p := range []string{"/expectation.json", "/expectation"} {
			began := time.Now()
			a := v.request("POST", p, "application/x-www-form-urlencoded", strings.NewReader(body))
			quiet(t, p+" "+body[:20], a)
			if took := time.Since(began); took > 30*time.Second {
				t.Errorf("%s with %.20s...: %s", p, body, took)
			}
		}
	}
}

// The text search takes words; its own language of queries is not open to
// readers.
func TestTextSearchAbuse(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, q := range []string{
		`"`, `""`, `*`, `a*`, `NEAR(a b)`, `a NEAR/99999999 b`, `AND`, `OR OR`, `NOT`, `-a`, `^a`, `{a b}:c`, `system_name:x`, `a" OR "b`, `'; DROP TABLE systems; --`,
		strings.Repeat("(", 500), strings.Repeat("a ", 2_000), strings.Repeat(`"a" OR `, 500), "\x00", "\xff\xfe", "%", "_", "\u202e", strings.Repeat("é", 5_000), "a AND " + strings.Repeat("b OR ", 300) + "c", "(a+)+$", `[[:alpha:]]*`, `\`,
	} {
		for _, p := range []string{"/systems?q=", "/systems.csv?q=", "/?q="} {
			a := v.get(p + url.QueryEscape(q))
			if a.status != http.StatusOK && a.status != http.StatusBadRequest && a.status != http.StatusRequestHeaderFieldsTooLarge {
				t.Errorf("%s%.40q: %d %s", p, q, a.status, a.text())
			}
		}
	}
	if n := len(v.get("/systems.json?q=zzzz+OR+channel").body); n != len(v.get("/systems.json?q=zzzz+OR+channel").body) || strings.Contains(v.get("/systems.json?q=zzzzqqqq").body, `"slug"`) {
		t.Error("a word nobody wrote finds a system")
	}
}

// What a spreadsheet would run as a formula is kept from running on the way
// out, and comes back as it was typed; numbers are never touched.
func TestFormulasInExports(t *testing.T) {
	s := newSite(t)
	table := csvHead[:len(csvHead)-1] + ",notes\n"
	evil := []string{"=HYPERLINK(\"http://evil.example\")", "+1+1", "-2+3", "@SUM(A1)", "\tlead", "=cmd|' /C calc'!A0"}
	for i, e := range evil {
		table += fmt.Sprintf("Loom %d,-%d.5,-20,1.4,peak,thalweg,Invented 2031,0.004,\"%s\"\n", i, 10+i, strings.ReplaceAll(e, `"`, `""`))
	}
	mustRun(t, "", "import", "-catalogue", s.file, "-publish", tempFile(t, "evil.csv", table))
	for _, p := range []string{"/systems.csv", "/regression.csv?model=linear:valley_slope&seed=1"} {
		a := s.visitor().get(p)
		quiet(t, p, a)
		rows, err := csv.NewReader(strings.NewReader(a.body)).ReadAll()
		if err != nil {
			if a.status == http.StatusOK {
				t.Errorf("%s: %v", p, err)
			}
			continue
		}
		for _, row := range rows {
			for _, cell := range row {
				if cell != "" && strings.ContainsRune("=+@\t\r", rune(cell[0])) || strings.HasPrefix(cell, "-2+3") {
					t.Errorf("%s: cell %q would run", p, cell)
				}
			}
		}
	}
	back := filepath.Join(t.TempDir(), "back.db")
	mustRun(t, s.visitor().get("/systems.csv").body, "import", "-catalogue", back, "-publish", "-")
	if a, b := mustRun(t, "", "export", "-catalogue", s.file), mustRun(t, "", "export", "-catalogue", back); a != b {
		t.Errorf("the round trip changed something:\n%s\n%s", a, b)
	}
}

// A client that sends or reads slowly loses its connection, and others are
// answered meanwhile.
func TestSlowClients(t *testing.T) {
	s := &site{t: t, file: filepath.Join(t.TempDir(), "c.db")}
	s.start(serveConfig{Catalogue: s.file, Timeouts: timeouts{header: 300 * time.Millisecond, read: 600 * time.Millisecond, write: 5 * time.Second, idle: 400 * time.Millisecond}})
	for what, text := range map[string]string{
		"an unfinished header": "GET / HTTP/1.1\r\nHost: x\r\nX-Slow: ",
		"nothing at all":       "",
		"an unfinished body":   "POST /sign-in HTTP/1.1\r\nHost: x\r\nContent-Type: application/x-www-form-urlencoded\r\nContent-Length: 1000\r\n\r\nname=a",
		"an idle connection":   "GET /healthz HTTP/1.1\r\nHost: x\r\n\r\n",
	} {
		if _, closed := raw(t, s.base, text, 20*time.Second); !closed {
			t.Errorf("%s keeps its connection", what)
		}
	}
	var held []net.Conn
	for range 200 {
		conn, err := net.Dial("tcp", strings.TrimPrefix(s.base, "http://"))
		if err != nil {
			t.Fatal(err)
		}
		defer conn.Close()
		fmt.Fprint(conn, "GET / HTTP/1.1\r\nHost: x\r\n")
		held = append(held, conn)
	}
	s.visitor().get("/healthz").is(http.StatusOK)
	for _, conn := range held {
		_ = conn.SetReadDeadline(time.Now().Add(20 * time.Second))
		if _, err := bufio.NewReader(conn).ReadByte(); err == nil {
			continue // told so before it was closed
		} else if strings.Contains(err.Error(), "timeout") {
			t.Fatal("a slow connection is still held")
		}
	}
}

func TestUploadsAreBounded(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	v := s.as("ann")
	send := func(name string, content io.Reader) *answer {
		pr, pw := io.Pipe()
		w := multipart.NewWriter(pw)
		go func() {
			part, _ := w.CreateFormFile("file", name)
			_, err := io.Copy(part, content)
			w.Close()
			pw.CloseWithError(err)
		}()
		r, err := http.NewRequest("POST", v.base+"/contribute/upload", pr)
		if err != nil {
			t.Fatal(err)
		}
		r.Header.Set("Content-Type", w.FormDataContentType())
		resp, err := v.client.Do(r)
		if err != nil { // cut off while it was still sending
			return &answer{t: t, status: http.StatusRequestEntityTooLarge}
		}
		defer resp.Body.Close()
		b, _ := io.ReadAll(resp.Body)
		return &answer{t, "upload", resp.StatusCode, resp.Request.URL, resp.Header, string(b)}
	}
	send("endless.csv", io.LimitReader(zeros{}, 4*maxUpload)).is(http.StatusRequestEntityTooLarge)
	for name, content := range map[string]string{
		"wide.csv": strings.Repeat("a,", 200_000), "quote.csv": `"` + strings.Repeat("x", 1<<20), "deep.csv": csvHead + strings.Repeat("\"\"\"\"", 100_000),
		"zip.csv": "PK\x03\x04" + strings.Repeat("\x00", 1000), "nul.csv": csvHead + strings.Repeat("\x00,", 1000), "../../evil.csv": csvHead,
	} {
		if a := send(name, strings.NewReader(content)); a.status != http.StatusUnprocessableEntity && a.status != http.StatusBadRequest && a.status != http.StatusOK {
			t.Errorf("%s: %d %s", name, a.status, a.text())
		}
	}
	v.get("/healthz").is(http.StatusOK)
}

type zeros struct{}

func (zeros) Read(p []byte) (int, error) { return len(p), nil }

// Files to measure that are made to grow in the reading.
func TestBombsToMeasure(t *testing.T) {
	v := newDemoSite(t).visitor()
	lol := `<?xml version="1.0"?><!DOCTYPE kml [<!ENTITY a "aaaaaaaaaa">` + func() string {
		var b strings.Builder
		for i := 'b'; i < 'k'; i++ {
			fmt.Fprintf(&b, `<!ENTITY %c "%s">`, i, strings.Repeat(fmt.Sprintf("&%c;", i-1), 10))
		}
		return b.String()
	}() + `]><kml><Document><Placemark><LineString><coordinates>&j;</coordinates></LineString></Placemark></Document></kml>`
	outside := `<?xml version="1.0"?><!DOCTYPE gpx [<!ENTITY x SYSTEM "file:///etc/passwd">]><gpx><trk><name>&x;</name><trkseg><trkpt lat="1" lon="2"/><trkpt lat="1.1" lon="2.1"/><trkpt lat="1.2" lon="2.1"/></trkseg></trk></gpx>`
	for what, body := range map[string][2]string{
		"nested entities": {"application/vnd.google-earth.kml+xml", lol}, "an outside entity": {"application/gpx+xml", outside},
		"deep XML": {"application/gpx+xml", strings.Repeat("<a>", 200_000)}, "deep JSON": {"application/geo+json", strings.Repeat("[", 500_000)},
		"deep geometry": {"application/geo+json", strings.Repeat(`{"type":"GeometryCollection","geometries":[`, 20_000)}, "deep WKT": {"text/plain", strings.Repeat("GEOMETRYCOLLECTION(", 50_000)},
		"a zip": {"application/zip", "PK\x03\x04" + strings.Repeat("A", 4096)}, "an empty database": {"application/geopackage+sqlite3", "SQLite format 3\x00" + strings.Repeat("\x00", 4096)},
		"huge numbers": {"text/plain", "LINESTRING(1e308 1e308, -1e308 1e308, 0 0)"}, "no numbers": {"text/csv", "x,y\nNaN,Inf\n-Inf,NaN\n"},
	} {
		began := time.Now()
		a := v.request("POST", "/measure.json", body[0], bytes.NewReader([]byte(body[1])))
		if a.status != http.StatusUnprocessableEntity && a.status != http.StatusBadRequest && a.status != http.StatusOK {
			t.Errorf("%s: %d %.300s", what, a.status, a.body)
		}
		if strings.Contains(a.body, "root:") || strings.Contains(a.body, "aaaaaaaaaaaaaaaaaaaa") {
			t.Errorf("%s is expanded", what)
		}
		if took := time.Since(began); took > 20*time.Second {
			t.Errorf("%s takes %s", what, took)
		}
	}
}

// Neither the words nor, within what hashing costs, the time tells whether a
// name exists: both are answered after one hash.
func TestNamesCannotBeGuessed(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	say := func(name string) string {
		a := s.visitor().post("/sign-in", url.Values{"name": {name}, "password": {"wrong password"}}).is(http.StatusUnprocessableEntity)
		return strings.ReplaceAll(a.text(), name, "NAME")
	}
	if a, b := say("ann"), say("bob"); a != b {
		t.Errorf("a name that exists is told from one that does not:\n%s\n%s", a, b)
	}
}
