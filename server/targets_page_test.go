package main

import (
	"bytes"
	"context"
	"fmt"
	"log/slog"
	"mime/multipart"
	"net/http"
	"net/url"
	"strings"
	"sync"
	"testing"
	"time"
)

// manyTargets is a file of n targets, of which the first bad lie beyond the
// pole. No two ask the same.
func manyTargets(n, bad int) []byte {
	var b bytes.Buffer
	b.WriteString("name,palaeolatitude,age\n")
	for i := range n {
		lat := float64(i%160) - 80 + float64(i)/20_000
		if i < bad {
			lat = 95
		}
		fmt.Fprintf(&b, "Hidden %d,%g,%d\n", i, lat, i%90)
	}
	return b.Bytes()
}

// sendTargets is the form of the page, as a browser sends it.
func (v *visitor) sendTargets(file []byte, settings map[string]string) *answer {
	v.t.Helper()
	var b bytes.Buffer
	w := multipart.NewWriter(&b)
	for name, value := range settings {
		_ = w.WriteField(name, value)
	}
	part, err := w.CreateFormFile("targets", "targets.csv")
	if err != nil {
		v.t.Fatal(err)
	}
	_, _ = part.Write(file)
	w.Close()
	r, err := http.NewRequest("POST", v.base+"/expectation/batch", &b)
	if err != nil {
		v.t.Fatal(err)
	}
	r.Header.Set("Content-Type", w.FormDataContentType())
	r.Header.Set("Accept", "text/html,application/xhtml+xml,*/*;q=0.8")
	return v.do(r)
}

// answered asks for a page of progress until it is the page of the answers.
func (v *visitor) answered(a *answer) *answer {
	v.t.Helper()
	for range 1200 {
		if a.status != http.StatusAccepted {
			return a.is(http.StatusOK)
		}
		time.Sleep(100 * time.Millisecond)
		a = v.get(a.url.RequestURI())
	}
	v.t.Fatalf("%s is never done: %s", a.what, a.text())
	return nil
}

// answersTo sends a file of targets and reads the rows that come back, at once
// or from the page.
func (v *visitor) answersTo(file []byte) []map[string]string {
	v.t.Helper()
	a := v.sendTargets(file, nil)
	if a.url.RawQuery != "" {
		a = v.post("/expectation/batch/answers", v.answered(a).form("form[action='/expectation/batch/answers']"))
	}
	return readTargets(v.t, a.is(http.StatusOK).body)
}

// A long file without scripts: its progress, its answers once, nothing kept,
// and nothing of it in the log.
func TestManyTargetsOnAPage(t *testing.T) {
	var log logBuffer
	s := &site{t: t}
	s.start(serveConfig{Log: slog.New(slog.NewJSONHandler(&log, nil))})
	v := s.visitor()
	const all, bad = 1500, 130
	running := v.sendTargets(manyTargets(all, bad), map[string]string{"seed": "3"}).is(http.StatusAccepted).says("of 1,500 done")
	if running.header.Get("Refresh") != "1" || running.doc().Find("progress").Length() != 1 || running.url.Path != "/expectation/batch" {
		t.Errorf("no progress is shown at an address of its own, or it does not ask again: %s %v", running.url, running.header)
	}
	done := v.answered(running).says("1,370 of 1,500 targets answered; 130 could not be", "The first 100 of 130 stand here")
	for _, a := range []*answer{running, done} {
		if a.header.Get("Cache-Control") != "no-store" {
			t.Errorf("a page of targets may be stored: %v", a.header)
		}
	}
	if done.header.Get("Refresh") != "" {
		t.Error("the answered page loads itself again")
	}
	rows := done.doc().Find("table.data tbody tr")
	if first := rows.First(); rows.Length() != 100 || first.Find("th").Text() != "2" || first.Find("code").Text() != "palaeolatitude" ||
		!strings.Contains(first.Find(".prose").Text(), `"95"`) || rows.Last().Find("th").Text() != "101" {
		t.Errorf("%d rows without an answer are listed, the first as %q", rows.Length(), first.Text())
	}

	form := done.form("form[action='/expectation/batch/answers']")
	file := v.post("/expectation/batch/answers", form).is(http.StatusOK)
	if !strings.HasPrefix(file.header.Get("Content-Type"), "text/csv") || file.header.Get("Cache-Control") != "no-store" || !strings.Contains(file.header.Get("Content-Disposition"), "attachment") {
		t.Errorf("the answers come as %v", file.header)
	}
	answers := readTargets(t, file.body)
	failed := 0
	for _, r := range answers {
		if r["error"] != "" {
			failed++
		}
	}
	if len(answers) != all || failed != bad {
		t.Errorf("%d answers, %d without one; want %d, %d", len(answers), failed, all, bad)
	}
	// The last row is the same question as one target.
	last := answers[all-1]
	one := expectationOf(t, v.get("/expectation.json?seed=3&palaeolatitude="+last["palaeolatitude"]+"&age="+last["age"]))
	if got := fmt.Sprint(one.Combined.Sinuosity["p50"]); got != last["result_p50"] {
		t.Errorf("median in the file %s, alone %s", last["result_p50"], got)
	}
	v.get(done.url.RequestURI()).is(http.StatusNotFound).says("not held")
	v.post("/expectation/batch/answers", form).is(http.StatusNotFound).says("not held")
	v.post("/expectation/batch/cancel", form).is(http.StatusNotFound).says("not held")

	said := log.String()
	if !strings.Contains(said, "/expectation/batch/answers") {
		t.Fatalf("the requests are not in the log:\n%s", said)
	}
	for _, secret := range []string{"Hidden", "palaeolatitude", form.Get("key")} {
		if strings.Contains(said, secret) {
			t.Errorf("the log holds %q", secret)
		}
	}
}

// A short file is answered at once, and so is any file of a program.
func TestFewTargetsAreAnsweredAtOnce(t *testing.T) {
	v := newDemoSite(t).visitor()
	v.get("/expectation?palaeolatitude=30").is(http.StatusOK) // fits the explanations
	few := v.sendTargets(manyTargets(5, 1), map[string]string{"draws": "200"}).is(http.StatusOK)
	if rows := readTargets(t, few.body); len(rows) != 5 || rows[0]["error"] == "" || rows[4]["result_p50"] == "" || few.url.RawQuery != "" {
		t.Errorf("a short file gave, at %s, %s", few.url, few.body)
	}
	many := v.request("POST", "/expectation/batch?draws=1000", "text/csv", bytes.NewReader(manyTargets(1000, 0))).is(http.StatusOK)
	if rows := readTargets(t, many.body); len(rows) != 1000 || rows[999]["result_p50"] == "" {
		t.Errorf("a program got %d rows", len(rows))
	}
	if a := v.get("/expectation/batch"); a.url.Path != "/expectation" {
		t.Errorf("no key leads to %s", a.url)
	}
	v.get("/expectation/batch?key=guessed").is(http.StatusNotFound).says("not held")
}

// A file that cannot be taken comes back to the form with why.
func TestRefusedTargetsKeepTheirPage(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, c := range []struct {
		file   string
		status int
		says   string
	}{
		{"", http.StatusUnprocessableEntity, "empty"},
		{"height,depth\n1,2\n", http.StatusUnprocessableEntity, "No column of the header is a parameter"},
		{"palaeolatitude,age\n", http.StatusUnprocessableEntity, "no rows below its header"},
		{"palaeolatitude\n" + strings.Repeat("1\n", batchTargets+1), http.StatusUnprocessableEntity, "holds 10001 targets. Expected at most 10000"},
		{"palaeolatitude,remark\n1," + strings.Repeat("x", batchBytes), http.StatusRequestEntityTooLarge, "larger than 8 MB"},
	} {
		a := v.sendTargets([]byte(c.file), map[string]string{"feeder": "river"}).is(c.status).says(c.says)
		form := a.doc().Find("form[action='/expectation/batch']")
		if form.Find("input[type=file][name=targets]").Length() != 1 || form.Find("input[name=feeder][value=river]").Length() != 1 {
			t.Errorf("%q: the form or the rows chosen for it are lost", clip(c.file))
		}
	}
	v.sendTargets(manyTargets(1, 0), map[string]string{"draws": "many"}).is(http.StatusBadRequest).says("draws")
	v.sendTargets(manyTargets(1, 0), map[string]string{"colour": "blue"}).is(http.StatusBadRequest).says("colour")
}

// Files can be cancelled, which makes room; with too many on their way the next
// is told so on its page.
func TestManyTargetsCancelledAndTooMany(t *testing.T) {
	v := newDemoSite(t).visitor()
	var on []*answer
	for range batchRunning {
		on = append(on, v.sendTargets(manyTargets(batchTargets, 0), map[string]string{"feeder": "river", "draws": "20000"}).is(http.StatusAccepted))
	}
	full := v.sendTargets(manyTargets(3, 0), nil).is(http.StatusServiceUnavailable).says("Other files of targets are being answered", "4 are answered at once")
	if full.header.Get("Retry-After") == "" || full.doc().Find("form[action='/expectation/batch']").Length() != 1 {
		t.Error("a full server does not say when to come back, or takes the form away")
	}
	for _, a := range on {
		form := a.form("form[action='/expectation/batch/cancel']")
		v.post("/expectation/batch/answers", form).is(http.StatusAccepted) // not there yet
		back := v.post("/expectation/batch/cancel", form).is(http.StatusOK).says("was cancelled")
		if back.doc().Find("form[action='/expectation/batch'] input[name=feeder][value=river]").Length() != 1 {
			t.Error("the rows chosen for the file are lost with it")
		}
		v.get(a.url.RequestURI()).is(http.StatusNotFound)
	}
	v.answered(v.sendTargets(manyTargets(3, 0), nil))
}

// Ten minutes after its answers were there, or after the last look at one on
// its way, a file is forgotten; only so many are held.
func TestTargetsAreForgotten(t *testing.T) {
	at := time.Date(2031, 5, 6, 7, 8, 9, 0, time.UTC)
	b := &batches{now: func() time.Time { return at }}
	quick := func(context.Context, *batchJob) error { return nil }
	var ended sync.WaitGroup
	slow := func(ctx context.Context, _ *batchJob) error { <-ctx.Done(); ended.Done(); return ctx.Err() }
	start := func(answer func(context.Context, *batchJob) error) *batchJob {
		t.Helper()
		j, err := b.start(t.Context(), url.Values{}, 1, answer)
		if err != nil {
			t.Fatal(err)
		}
		return j
	}
	done := start(quick)
	<-done.done
	ended.Add(1)
	running := start(slow)
	at = at.Add(batchKept - time.Second)
	if b.find(done.key) == nil || b.find(running.key) == nil {
		t.Fatal("forgotten too early")
	}
	at = at.Add(2 * time.Second)
	if b.find(done.key) != nil {
		t.Error("answers are held longer than ten minutes")
	}
	if b.find(running.key) == nil {
		t.Error("a file that somebody asks for is dropped")
	}
	at = at.Add(batchKept)
	b.sweep()
	ended.Wait() // its work ends, not only its address
	<-running.done
	if b.find(running.key) != nil || len(b.held) != 0 {
		t.Error("a file that nobody asks for is held")
	}
	for range batchHeld {
		<-start(quick).done
	}
	_, err := b.start(t.Context(), url.Values{}, 1, quick)
	if problemOf(err).Status != http.StatusServiceUnavailable {
		t.Errorf("one file more than are held: %v", err)
	}
	b.halt()
	if _, err := b.start(t.Context(), url.Values{}, 1, quick); err == nil || len(b.held) != 0 {
		t.Error("a program that stops takes another file")
	}
}
