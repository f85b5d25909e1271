package main

import (
	"bufio"
	"context"
	"database/sql"
	"flag"
	"fmt"
	"math/rand/v2"
	"net/http"
	"net/url"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"fathombend/catalogue"
)

// faults asks for the whole series and for what needs root (a file system of
// its own); see .ci/faults. Without it the same code runs a short series.
var faults = flag.Bool("faults", false, "the whole series of kills, and faults of the disk (needs root)")

// buildProgram builds the real program.
func buildProgram(t *testing.T) string {
	t.Helper()
	bin := filepath.Join(t.TempDir(), "fathombend")
	if out, err := exec.Command("go", "build", "-o", bin, ".").CombinedOutput(); err != nil {
		t.Fatalf("build: %v\n%s", err, out)
	}
	return bin
}

// program is one run of it.
type program struct {
	cmd  *exec.Cmd
	base string
	done chan struct{}
}

// startProgram runs serve and waits until it says its address.
func startProgram(t *testing.T, bin string, args ...string) *program {
	t.Helper()
	p := &program{cmd: exec.Command(bin, append([]string{"serve", "-listen", "127.0.0.1:0"}, args...)...), done: make(chan struct{})}
	out, err := p.cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	var said logBuffer
	p.cmd.Stderr = &said
	if err := p.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(out)
	for lines.Scan() {
		if _, after, ok := strings.Cut(lines.Text(), " on http://"); ok {
			p.base = "http://" + strings.TrimSpace(after)
			break
		}
	}
	go func() {
		for lines.Scan() {
		}
		_ = p.cmd.Wait()
		close(p.done)
	}()
	if p.base == "" {
		<-p.done
		t.Fatalf("the program did not listen:\n%s", said.String())
	}
	return p
}

// kill ends it as a crash of the program would: without any warning.
func (p *program) kill() {
	_ = p.cmd.Process.Kill()
	<-p.done
}

// acknowledged is what a writer was told was stored.
type acknowledged struct {
	mu   sync.Mutex
	name map[int64]string
	n    chan struct{}
}

func (a *acknowledged) count() int {
	a.mu.Lock()
	defer a.mu.Unlock()
	return len(a.name)
}

// writeOn sends records as fast as the program takes them until it is killed.
func (a *acknowledged) writeOn(jar http.CookieJar, p *program, next func() string) {
	client := &http.Client{Jar: jar, Timeout: 20 * time.Second, CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}
	defer client.CloseIdleConnections()
	for {
		select {
		case <-p.done:
			return
		default:
		}
		name := next()
		form := url.Values{"action": {"save"}}
		for k, v := range goodRecord() {
			form.Set(k, v)
		}
		form.Set("system_name", name)
		resp, err := client.PostForm(p.base+"/contribute", form)
		if err != nil {
			continue
		}
		to := resp.Header.Get("Location")
		resp.Body.Close()
		if id, err := strconv.ParseInt(strings.TrimPrefix(to, "/contribute/"), 10, 64); err == nil && resp.StatusCode == http.StatusSeeOther {
			a.mu.Lock()
			a.name[id] = name
			a.mu.Unlock()
			select {
			case a.n <- struct{}{}:
			default:
			}
		}
	}
}

// Every write that was acknowledged over HTTP is there, whole, after kill -9 at
// random moments with writers at work. Power loss cannot be shown this way: the
// pages of a killed program stay with the kernel.
func TestKillLosesNothingAcknowledged(t *testing.T) {
	kills, writes := 4, 80
	if *faults {
		kills, writes = 40, 2000
	}
	bin, file := buildProgram(t), filepath.Join(t.TempDir(), "c.db")
	mustRun(t, testPassword+"\n", "account", "-catalogue", file, "add", "ann")
	acked := &acknowledged{name: map[int64]string{}, n: make(chan struct{}, 1)}
	var number int
	var mu sync.Mutex
	next := func() string {
		mu.Lock()
		defer mu.Unlock()
		number++
		return fmt.Sprintf("Kill Channel %d", number)
	}
	v := (&site{t: t}).visitor()
	seed := rand.Uint64()
	random := rand.New(rand.NewPCG(seed, 1))
	began := time.Now()
	for k := 1; k <= kills; k++ {
		p := startProgram(t, bin, "-catalogue", file)
		if k == 1 {
			v.base = p.base
			v.post("/sign-in", url.Values{"name": {"ann"}, "password": {testPassword}}).is(http.StatusOK)
		}
		var writers sync.WaitGroup
		for range 3 {
			writers.Go(func() { acked.writeOn(v.client.Jar, p, next) })
		}
		want := writes * k / kills
		for acked.count() < want {
			select {
			case <-acked.n:
			case <-p.done:
				t.Fatal("the program ended by itself")
			case <-time.After(60 * time.Second):
				t.Fatalf("no write was acknowledged for a minute; %d so far", acked.count())
			}
		}
		time.Sleep(time.Duration(random.Int64N(int64(30 * time.Millisecond))))
		p.kill()
		writers.Wait()
	}
	lost, corrupt := countAcknowledged(t, file, acked.name)
	t.Logf("seed %d: %d acknowledged writes, %d kill -9, %d lost, %d corrupt, %.0f s", seed, len(acked.name), kills, lost, corrupt, time.Since(began).Seconds())
	if lost > 0 || corrupt > 0 || len(acked.name) < writes {
		t.Errorf("%d writes acknowledged: %d lost, %d corrupt", len(acked.name), lost, corrupt)
	}
}

// countAcknowledged looks for every acknowledged record, and for faults in the
// file, each of which counts as corrupt.
func countAcknowledged(t *testing.T, file string, name map[int64]string) (lost, corrupt int) {
	t.Helper()
	ctx := context.Background()
	s, err := catalogue.Open(ctx, file, catalogue.Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	for id, want := range name {
		sub, err := s.Submission(ctx, id)
		switch {
		case catalogue.CodeOf(err) == catalogue.NotFound:
			lost++
		case err != nil || sub.Row.SystemName != want || num(sub.Row.Sinuosity) != 1.62 || num(sub.Row.LatitudeDeg) != -24.5 || sub.State != "draft":
			corrupt++
		}
	}
	found, err := s.Integrity(ctx)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range found {
		t.Log(f)
	}
	return lost, corrupt + len(found)
}

// saves sends one record and says what came back.
func (v *visitor) saves(name string) *answer {
	return v.post("/contribute", press(fillIn(url.Values{}, mapWith(goodRecord(), "system_name", name)), "save"))
}

func mapWith(m map[string]string, key, value string) map[string]string {
	m[key] = value
	return m
}

// A lock that another program holds longer than the program waits is said, and
// writing goes on once it is gone.
func TestLockedCatalogueIsSaid(t *testing.T) {
	if !*faults {
		t.Skip("waits for the lock to run out; run with -faults (.ci/faults)")
	}
	s := newSite(t)
	s.person("ann", "contributor")
	v := s.as("ann")
	other, err := sql.Open("sqlite", "file:"+s.file+"?_txlock=immediate")
	if err != nil {
		t.Fatal(err)
	}
	defer other.Close()
	tx, err := other.Begin()
	if err != nil {
		t.Fatal(err)
	}
	began := time.Now()
	v.saves("Locked Out").is(http.StatusServiceUnavailable).says("holds the catalogue locked", "nothing was stored", "request")
	t.Logf("locked: 503 with its sentence after %.0f s; reading goes on", time.Since(began).Seconds())
	v.get("/systems").is(http.StatusOK)
	if err := tx.Rollback(); err != nil {
		t.Fatal(err)
	}
	v.saves("Let In").is(http.StatusOK).says("draft is saved")
}

// onDisk mounts a small file system of its own.
func onDisk(t *testing.T, size string) string {
	t.Helper()
	if !*faults {
		t.Skip("mounts a file system, which needs root; run with -faults (.ci/faults)")
	}
	dir := t.TempDir()
	if out, err := exec.Command("mount", "-t", "tmpfs", "-o", "size="+size, "tmpfs", dir).CombinedOutput(); err != nil {
		t.Fatalf("mount: %v %s", err, out)
	}
	t.Cleanup(func() {
		if out, err := exec.Command("umount", "-l", dir).CombinedOutput(); err != nil {
			t.Errorf("umount: %v %s", err, out)
		}
	})
	return dir
}

func TestFullDiskIsSaid(t *testing.T) {
	dir := onDisk(t, "6m")
	s := &site{t: t, file: filepath.Join(dir, "c.db")}
	copies := filepath.Join(dir, "copies")
	s.start(serveConfig{Catalogue: s.file, BackupDir: copies, BackupEvery: time.Hour, BackupKeep: 2})
	s.person("ann", "contributor")
	v := s.as("ann")
	v.saves("Before").is(http.StatusOK).says("draft is saved")
	ballast, err := os.Create(filepath.Join(dir, "ballast"))
	if err != nil {
		t.Fatal(err)
	}
	for block := make([]byte, 4096); err == nil; {
		_, err = ballast.Write(block)
	}
	ballast.Close()
	refused := 0
	for i := range 60 { // what is left of the write-ahead log takes a few
		a := v.saves(fmt.Sprintf("While Full %d", i))
		if a.status == http.StatusServiceUnavailable {
			a.says("disk with the catalogue is full", "Needed: free space on that disk", "request")
			refused++
		} else {
			a.is(http.StatusOK)
		}
	}
	if refused == 0 {
		t.Fatal("nothing was refused on a full disk")
	}
	for _, p := range []string{"/", "/systems", "/account", "/healthz"} {
		v.get(p).is(http.StatusOK)
	}
	back := filepath.Join(dir, "full.db")
	if code, _, said := runCommand("", "backup", "-catalogue", s.file, back); code != exitProblem || !strings.Contains(said, "full") {
		t.Errorf("backup to a full disk: exit %d, %q", code, said)
	}
	if _, err := os.Stat(back); err == nil {
		t.Error("a backup to a full disk left a file")
	}
	if err := os.Remove(filepath.Join(dir, "ballast")); err != nil {
		t.Fatal(err)
	}
	v.saves("After").is(http.StatusOK).says("draft is saved")
	if out := mustRun(t, "", "check", "-catalogue", s.file); !strings.Contains(out, "0 faults") {
		t.Error(out)
	}
	t.Logf("full disk: %d of 60 writes refused with 503 and the sentence, pages read, backup refused without a file left; written again without restart; 0 faults", refused)
}

func TestReadOnlyFileSystemIsSaid(t *testing.T) {
	dir := onDisk(t, "6m")
	file := filepath.Join(dir, "c.db")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "t.csv", goodCSV))
	remount := func(how string) {
		if out, err := exec.Command("mount", "-o", "remount,"+how, dir).CombinedOutput(); err != nil {
			t.Fatalf("remount: %v %s", err, out)
		}
	}
	remount("ro")
	if code, _, said := runCommand("", "serve", "-listen", "127.0.0.1:0", "-catalogue", file); code != exitProblem || !strings.Contains(said, "missing or may not be written") {
		t.Errorf("serve: exit %d, %q", code, said)
	}
	ro := &site{t: t}
	ro.start(serveConfig{Catalogue: file, ReadOnly: true})
	ro.visitor().get("/systems").is(http.StatusOK).says("Loom Channel")
	remount("rw")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "more.csv", strings.ReplaceAll(goodCSV, "Weft", "Heddle")))
	t.Log("read-only file system: serve ends with 1 and a sentence, serve -read-only serves; written again once it may be")
}

// The folder is moved away under a running program and put back.
func TestFolderMovedAway(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "here")
	if err := os.Mkdir(dir, 0o700); err != nil {
		t.Fatal(err)
	}
	s := &site{t: t, file: filepath.Join(dir, "c.db")}
	s.start(serveConfig{Catalogue: s.file})
	s.person("ann", "contributor")
	v := s.as("ann")
	if err := os.Rename(dir, dir+"-away"); err != nil {
		t.Fatal(err)
	}
	v.get("/healthz").is(http.StatusServiceUnavailable).says("cannot be opened")
	for _, p := range []string{"/", "/systems", "/systems?q=x"} {
		if a := v.get(p); a.status != http.StatusOK && a.status != http.StatusServiceUnavailable {
			t.Errorf("%s: %d", p, a.status)
		}
	}
	if a := v.saves("Moved"); a.status != http.StatusOK && a.status != http.StatusServiceUnavailable {
		t.Errorf("writing: %d %s", a.status, a.text())
	}
	if err := os.Rename(dir+"-away", dir); err != nil {
		t.Fatal(err)
	}
	v.get("/healthz").is(http.StatusOK)
	v.saves("Back").is(http.StatusOK).says("draft is saved")
	if out := mustRun(t, "", "check", "-catalogue", s.file); !strings.Contains(out, "0 faults") {
		t.Error(out)
	}
}
