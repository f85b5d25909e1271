package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const goodCSV = csvHead + "Loom Channel,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\nWeft Channel,12 30 S,-21,1.5,peak,thalweg,Invented 2031,0.003\n"

func tempFile(t *testing.T, name, content string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, []byte(content), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestImportAndExportCommands(t *testing.T) {
	file, table := filepath.Join(t.TempDir(), "c.db"), tempFile(t, "t.csv", goodCSV)
	code, out, _ := runCommand("", "import", "-catalogue", file, "-publish", table)
	if code != exitOK || !strings.Contains(out, "2 new, 0 changed, 0 identical") || !strings.Contains(out, "converted: line 3, column latitude_deg") {
		t.Fatalf("exit %d:\n%s", code, out)
	}
	code, out, _ = runCommand(goodCSV, "import", table, "-catalogue", file)
	if code != exitOK || !strings.Contains(out, "2 identical") {
		t.Errorf("again: exit %d:\n%s", code, out)
	}
	all := mustRun(t, "", "export", "-catalogue", file)
	if n := strings.Count(all, "\n"); n != 3 {
		t.Errorf("%d lines exported, want 3:\n%s", n, all)
	}
	for _, args := range [][]string{{"lat_min=-20"}, {"-lat_min", "-20"}, {"-lat_min=-20"}} {
		some := mustRun(t, "", append([]string{"export", "-catalogue", file}, args...)...)
		if strings.Count(some, "\n") != 2 || !strings.Contains(some, "Weft") {
			t.Errorf("export %v:\n%s", args, some)
		}
	}
	// From standard input, waiting for a curator.
	code, out, _ = runCommand(strings.ReplaceAll(goodCSV, "1.4", "1.45"), "import", "-catalogue", file, "-")
	if code != exitOK || !strings.Contains(out, "waiting for a curator") {
		t.Errorf("standard input: exit %d:\n%s", code, out)
	}
}

func TestImportReportsEveryBadRow(t *testing.T) {
	file := filepath.Join(t.TempDir(), "c.db")
	bad := csvHead + "Loom,91,-20,0.9,peak,thalweg,Invented 2031,0.004\nWeft,-31,-21,1.5,crooked,thalweg,Invented 2031,3\n"
	code, out, _ := runCommand("", "import", "-catalogue", file, "-publish", tempFile(t, "bad.csv", bad))
	if code != exitProblem {
		t.Errorf("exit %d, want %d", code, exitProblem)
	}
	for _, want := range []string{"refused: line 2, column latitude_deg, value \"91\"", "refused: line 2, column sinuosity, value \"0.9\"", "refused: line 3, column sinuosity_kind, value \"crooked\"", "Expected: one of: peak", "nothing stored", "2 refused"} {
		if !strings.Contains(out, want) {
			t.Errorf("the report lacks %q:\n%s", want, out)
		}
	}
	if rows := mustRun(t, "", "export", "-catalogue", file); strings.Count(rows, "\n") != 1 {
		t.Errorf("stored all the same:\n%s", rows)
	}
	// Warnings do not stop it and exit 0.
	odd := csvHead + "Loom,-30,-20,1.4,peak,thalweg,Invented 2031,3\n"
	if code, out, _ := runCommand("", "import", "-catalogue", file, "-publish", tempFile(t, "odd.csv", odd)); code != exitOK || !strings.Contains(out, "warning: line 2, column valley_slope, value \"3\"") {
		t.Errorf("exit %d:\n%s", code, out)
	}
}

func TestBadCalls(t *testing.T) {
	file, table := filepath.Join(t.TempDir(), "c.db"), tempFile(t, "t.csv", goodCSV)
	for _, c := range []struct {
		code int
		args []string
	}{
		{exitBadCall, []string{"import", table}},
		{exitBadCall, []string{"import", "-catalogue", file}},
		{exitBadCall, []string{"import", "-catalogue", file, table, table}},
		{exitBadCall, []string{"import", "-colour", "red", table}},
		{exitProblem, []string{"import", "-catalogue", file, table + ".missing"}},
		{exitBadCall, []string{"account", "add", "ann"}},
		{exitBadCall, []string{"account", "-catalogue", file}},
		{exitBadCall, []string{"account", "-catalogue", file, "dance"}},
		{exitBadCall, []string{"account", "-catalogue", file, "add"}},
		{exitBadCall, []string{"account", "-catalogue", file, "add", "ann", "-role", "admiral"}},
		{exitBadCall, []string{"account", "-catalogue", file, "role", "ann", "admiral"}},
		{exitProblem, []string{"account", "-catalogue", file, "role", "nobody", "curator"}},
		{exitProblem, []string{"account", "-catalogue", file, "add", "two words"}},
		{exitBadCall, []string{"backup", file + ".copy"}},
		{exitBadCall, []string{"backup", "-catalogue", file}},
		{exitProblem, []string{"backup", "-catalogue", file + ".missing", file + ".copy"}},
		{exitBadCall, []string{"restore", file}},
		{exitProblem, []string{"restore", file + ".missing", file + ".new"}},
		{exitProblem, []string{"check", "-catalogue", file + ".missing"}},
		{exitProblem, []string{"check", "-catalogue", table}},
		{exitBadCall, []string{"check", "thoroughly"}},
		{exitBadCall, []string{"export", "colour=red"}},
		{exitBadCall, []string{"export", "kind=canal"}},
		{exitBadCall, []string{"export", "submarine"}},
		{exitBadCall, []string{"dance"}},
	} {
		code, _, errOut := runCommand("", c.args...)
		if code != c.code || strings.TrimSpace(errOut) == "" {
			t.Errorf("%s: exit %d, want %d, saying %q", strings.Join(c.args, " "), code, c.code, errOut)
		}
	}
}

func TestHelpOfEveryCommand(t *testing.T) {
	for _, c := range commands() {
		code, out, errOut := runCommand("", c.name, "-h")
		if code != exitOK || len(out+errOut) < 80 {
			t.Errorf("%s -h: exit %d:\n%s%s", c.name, code, out, errOut)
		}
	}
	if code, out, _ := runCommand("", "-version"); code != exitOK || !strings.Contains(out, Version) {
		t.Errorf("-version: exit %d: %s", code, out)
	}
}

func TestAccountCommand(t *testing.T) {
	file := filepath.Join(t.TempDir(), "c.db")
	out := mustRun(t, "", "account", "-catalogue", file, "add", "ann", "-role", "curator", "-credit", "A. Reef")
	_, made, ok := strings.Cut(out, "Password (shown this once): ")
	if !ok || len(strings.TrimSpace(made)) < 20 {
		t.Fatalf("no password made up: %s", out)
	}
	if out := mustRun(t, testPassword+"\n", "account", "-catalogue", file, "add", "bo"); strings.Contains(out, testPassword) || strings.Contains(out, "shown this once") {
		t.Errorf("the password given is printed: %s", out)
	}
	mustRun(t, "", "account", "-catalogue", file, "role", "bo", "keeper")
	list := mustRun(t, "", "account", "-catalogue", file, "list")
	for _, want := range []string{"ann", "curator", "A. Reef", "bo", "keeper"} {
		if !strings.Contains(list, want) {
			t.Errorf("the list lacks %q:\n%s", want, list)
		}
	}
	if code, _, _ := runCommand("short\n", "account", "-catalogue", file, "password", "bo"); code != exitProblem {
		t.Errorf("a short password: exit %d, want %d", code, exitProblem)
	}
	// A new password signs out everywhere.
	s := &site{t: t, file: file}
	s.start(serveConfig{Catalogue: file})
	v := s.as("bo")
	v.get("/people").is(200).says("People")
	mustRun(t, "another tide table\n", "account", "-catalogue", file, "password", "bo")
	if v.get("/people").url.Path != "/sign-in" {
		t.Error("still signed in after the password was replaced")
	}
}

func TestBackupRestoreCheck(t *testing.T) {
	dir := t.TempDir()
	file, copied, back := filepath.Join(dir, "c.db"), filepath.Join(dir, "copy.db"), filepath.Join(dir, "back.db")
	mustRun(t, "", "import", "-catalogue", file, "-publish", tempFile(t, "t.csv", goodCSV))
	mustRun(t, "", "backup", "-catalogue", file, copied)
	if code, _, errOut := runCommand("", "backup", "-catalogue", file, copied); code != exitProblem || !strings.Contains(errOut, "exists already") {
		t.Errorf("backup over a file: exit %d: %s", code, errOut)
	}
	mustRun(t, "", "restore", copied, back)
	if code, _, _ := runCommand("", "restore", copied, back); code != exitProblem {
		t.Errorf("restore over a file: exit %d, want %d", code, exitProblem)
	}
	if a, b := mustRun(t, "", "export", "-catalogue", file), mustRun(t, "", "export", "-catalogue", back); a != b {
		t.Errorf("the restored catalogue differs:\n%s\n%s", a, b)
	}
	if out := mustRun(t, "", "check", "-catalogue", back); !strings.Contains(out, "2 measurements, 0 with a warning, 0 faults") {
		t.Errorf("check:\n%s", out)
	}
	// A damaged copy is told: a page of the file overwritten.
	b, err := os.ReadFile(copied)
	if err != nil {
		t.Fatal(err)
	}
	for i := 4096 * 3; i < 4096*12 && i < len(b); i++ {
		b[i] = 0xA5
	}
	damaged := tempFile(t, "damaged.db", string(b))
	if code, out, errOut := runCommand("", "check", "-catalogue", damaged); code != exitProblem {
		t.Errorf("a damaged catalogue: exit %d\n%s%s", code, out, errOut)
	}
	if code, _, _ := runCommand("", "restore", damaged, filepath.Join(dir, "from-damaged.db")); code != exitProblem {
		t.Errorf("restoring a damaged backup: exit %d, want %d", code, exitProblem)
	}
	if _, err := os.Stat(filepath.Join(dir, "from-damaged.db")); err == nil {
		t.Error("a damaged backup became a catalogue")
	}
}

func TestDemoIsTemporaryAndSaid(t *testing.T) {
	code, out, errOut := runCommand("", "export", "kind=river")
	if code != exitOK || !strings.Contains(errOut, "demo") || strings.Count(out, "\n") < 12 {
		t.Errorf("export of the demo: exit %d, %d lines, said %q", code, strings.Count(out, "\n"), errOut)
	}
	left, err := filepath.Glob(filepath.Join(os.TempDir(), "fathombend-demo-*"))
	if err != nil {
		t.Fatal(err)
	}
	for _, dir := range left {
		// Other tests may hold a demo open at this moment; this one must be gone.
		if strings.Contains(errOut, dir) {
			t.Errorf("%s is left behind", dir)
		}
	}
}

func TestInventCommand(t *testing.T) {
	file := filepath.Join(t.TempDir(), "large.db")
	out := mustRun(t, "", "invent", "-catalogue", file, "-systems", "200")
	if !strings.Contains(out, "200 systems") || !strings.Contains(out, "every one invented") {
		t.Errorf("invent said %q", out)
	}
	table := mustRun(t, "", "export", "-catalogue", file)
	rows := strings.Split(strings.TrimSpace(table), "\n")[1:]
	for _, row := range rows {
		if !strings.Contains(row, "Invented") {
			t.Fatalf("a row does not say that it is invented: %s", row)
		}
	}
	if len(rows) < 400 || len(rows) > 800 {
		t.Errorf("%d measurements of 200 systems, want about three each", len(rows))
	}
	// A catalogue that exists is never added to.
	if code, _, errOut := runCommand("", "invent", "-catalogue", file); code != exitProblem || !strings.Contains(errOut, "exists") {
		t.Errorf("over a file: exit %d: %s", code, errOut)
	}
	for _, args := range [][]string{{}, {"-catalogue", file + ".new", "-systems", "0"}, {"-catalogue", file + ".new", "-demo-law", "luck"}, {"-catalogue", file + ".new", "more"}} {
		if code, _, _ := runCommand("", append([]string{"invent"}, args...)...); code != exitBadCall {
			t.Errorf("invent %v: exit %d, want %d", args, code, exitBadCall)
		}
	}
	if _, err := os.Stat(file + ".new"); err == nil {
		t.Error("a refused call left a file")
	}
}
