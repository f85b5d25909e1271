package main

import (
	"compress/gzip"
	"io"
	"net/http"
	"strings"
	"testing"
)

// A held answer is the answer, byte for byte and header for header, in both
// encodings, until the catalogue changes; nobody signed in gets one.
func TestHeldAnswersAreTheAnswers(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	mustRun(t, "", "import", "-catalogue", s.file, "-publish", tempFile(t, "t.csv", goodCSV))
	plain := func(encoding string) (string, http.Header) {
		r, _ := http.NewRequest("GET", s.base+"/systems", nil)
		r.Header.Set("Accept-Encoding", encoding)
		resp, err := http.DefaultTransport.RoundTrip(r)
		if err != nil {
			t.Fatal(err)
		}
		defer resp.Body.Close()
		body := io.Reader(resp.Body)
		if resp.Header.Get("Content-Encoding") == "gzip" {
			if body, err = gzip.NewReader(resp.Body); err != nil {
				t.Fatal(err)
			}
		}
		b, err := io.ReadAll(body)
		if err != nil || resp.StatusCode != http.StatusOK {
			t.Fatal(resp.StatusCode, err)
		}
		return string(b), resp.Header
	}
	fresh, first := plain("gzip")
	again, second := plain("gzip")
	identity, _ := plain("identity")
	if fresh != again || fresh != identity || !strings.Contains(fresh, "Loom Channel") {
		t.Error("the held answer is another one")
	}
	for _, name := range []string{"Content-Type", "Content-Encoding", "Etag", "Cache-Control", "Content-Security-Policy", "X-Content-Type-Options"} {
		if first.Get(name) == "" || first.Get(name) != second.Get(name) {
			t.Errorf("%s: %q, then %q", name, first.Get(name), second.Get(name))
		}
	}
	if strings.Join(first.Values("Vary"), ",") != strings.Join(second.Values("Vary"), ",") || first.Get("X-Request-Id") == second.Get("X-Request-Id") {
		t.Errorf("%v\n%v", first, second)
	}
	if in := s.as("ann").get("/systems"); !strings.Contains(in.body, "Sign out") {
		t.Error("a signed-in person gets the page of a signed-out one")
	}
	if out, _ := plain("gzip"); out != fresh {
		t.Error("a signed-out reader gets the page of a signed-in person")
	}
	mustRun(t, "", "import", "-catalogue", s.file, "-publish", tempFile(t, "more.csv", strings.ReplaceAll(goodCSV, "Weft", "Heddle")))
	if changed, _ := plain("gzip"); !strings.Contains(changed, "Heddle Channel") {
		t.Error("the held answer outlived a change")
	}
}

func TestHeldAnswersAreBounded(t *testing.T) {
	s := newAnswers()
	for i := range 100 {
		s.put(string(rune(i)), &finished{body: make([]byte, largestAnswer)})
		if s.bytes > heldAnswers || len(s.held) != len(s.order) {
			t.Fatalf("%d bytes in %d answers", s.bytes, len(s.held))
		}
	}
	if s.get(string(rune(0))) != nil || s.get(string(rune(99))) == nil {
		t.Error("the oldest give way")
	}
}

// BenchmarkSystemsPage is the table of systems of the demo over HTTP, as
// signed-out readers ask for it.
func BenchmarkSystemsPage(b *testing.B) {
	v := newDemoSite(b).visitor()
	v.get("/systems").is(http.StatusOK)
	b.ReportAllocs()
	b.RunParallel(func(pb *testing.PB) {
		for pb.Next() {
			v.get("/systems").is(http.StatusOK)
		}
	})
}
