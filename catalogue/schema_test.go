package catalogue

import (
	"database/sql"
	"flag"
	"os"
	"regexp"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "write schema.sql anew")

const schemaHead = `-- The whole schema as the migrations leave it. Generated: go test ./catalogue -run Schema -update
`

// schemaOf writes the schema of a catalogue, without the shadow tables that
// SQLite makes for its virtual ones.
func schemaOf(t *testing.T, s *Store) string {
	rows, err := s.r.QueryContext(ctx, `SELECT sql FROM sqlite_schema WHERE sql IS NOT NULL AND NOT (type = 'table' AND (name LIKE 'search\_%' ESCAPE '\' OR name LIKE 'places\_%' ESCAPE '\' OR name LIKE 'sqlite\_%' ESCAPE '\' OR name LIKE 'frozen\_search\_%' ESCAPE '\' OR name LIKE 'line\_places\_%' ESCAPE '\' OR name LIKE 'hidden\_search\_%' ESCAPE '\'))
		ORDER BY tbl_name, type = 'trigger', type = 'index', name`)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	var b strings.Builder
	b.WriteString(schemaHead)
	for rows.Next() {
		var q string
		if err := rows.Scan(&q); err != nil {
			t.Fatal(err)
		}
		b.WriteString("\n" + q + ";\n")
	}
	return b.String()
}

func TestSchemaFileIsCurrent(t *testing.T) {
	got := schemaOf(t, open(t))
	if *update {
		if err := os.WriteFile("schema.sql", []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile("schema.sql")
	if err != nil {
		t.Fatal(err)
	}
	if got != string(want) {
		t.Error("schema.sql is not what the migrations make; run go test ./catalogue -run Schema -update and look at the difference")
	}
}

func TestSchemaEveryColumnHasAComment(t *testing.T) {
	table := regexp.MustCompile(`(?s)CREATE TABLE (\w+) \((.*?)\n\) STRICT`)
	column := regexp.MustCompile(`^  [a-z_0-9]+ [A-Z]`)
	n := 0
	for _, m := range table.FindAllStringSubmatch(schemaOf(t, open(t)), -1) {
		for _, line := range strings.Split(m[2], "\n") {
			if column.MatchString(line) {
				n++
				if !strings.Contains(line, " -- ") {
					t.Errorf("%s has no comment: %s", m[1], line)
				}
			}
		}
	}
	if n < len(Columns) {
		t.Errorf("only %d columns seen", n)
	}
}

// The schema itself refuses what the checks refuse, so that no way in can
// store it.
func TestSchemaRefuses(t *testing.T) {
	s := open(t)
	insert(t, s, row("Limits", 10, 20, 1.5))
	try := func(c Column, value any) error {
		_, err := s.w.ExecContext(ctx, `UPDATE `+c.Table+` SET `+c.Name+` = ?`, value)
		return err
	}
	for _, c := range Columns {
		if c.Table == TableSources || c.Name == "system" || c.Name == "measurement" {
			continue
		}
		bad, good := []any{}, []any{}
		switch {
		case c.Kind == KindChoice:
			bad = append(bad, "no such choice", nil)
			for _, v := range c.Choices {
				good = append(good, v)
			}
		case c.num == nil:
			bad = append(bad, strings.Repeat("x", c.MaxLen+1))
			good = append(good, strings.Repeat("é", c.MaxLen))
		default:
			bad = append(bad, c.Max*1.01+1, c.Min-1, "text")
			good = append(good, c.Max)
			if c.Open {
				bad = append(bad, c.Min)
			} else {
				good = append(good, c.Min)
			}
			if c.Kind == KindCount {
				bad = append(bad, 1.5)
			}
		}
		if c.Required && c.num == nil && c.Kind == KindText {
			bad = append(bad, "")
		}
		for _, v := range bad {
			if try(c, v) == nil {
				t.Errorf("%s = %.40v was stored", c.Name, v)
			}
		}
		for _, v := range good {
			if err := try(c, v); err != nil {
				t.Errorf("%s = %.40v was refused: %v", c.Name, v, err)
			}
		}
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}

func TestRevisionsStay(t *testing.T) {
	s := open(t)
	insert(t, s, row("One", 1, 2, 1.2))
	for _, q := range []string{`UPDATE revisions SET after = 'x'`, `DELETE FROM revisions`} {
		if _, err := s.w.ExecContext(ctx, q); err == nil {
			t.Errorf("%s went through", q)
		}
	}
}

func TestOpenRefuses(t *testing.T) {
	dir := t.TempDir()
	other := dir + "/other.db"
	db, err := sql.Open("sqlite", fileURI(other))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := db.Exec(`CREATE TABLE gpkg (id INTEGER)`); err != nil {
		t.Fatal(err)
	}
	db.Close()
	text := dir + "/text.db"
	if err := os.WriteFile(text, []byte(strings.Repeat("not a database. ", 100)), 0o644); err != nil {
		t.Fatal(err)
	}
	newer := dir + "/newer.db"
	s, err := Open(ctx, newer, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.w.Exec(`PRAGMA user_version = 999`); err != nil {
		t.Fatal(err)
	}
	s.Close()
	for path, want := range map[string]string{
		other: "another program", text: "not a SQLite file", newer: "newer version", dir + "/none/x.db": "cannot be opened", dir: "cannot be opened",
	} {
		s, err := Open(ctx, path, Options{})
		if err == nil {
			s.Close()
			t.Errorf("%s was opened", path)
			continue
		}
		if CodeOf(err) != Invalid || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v", path, err)
		}
	}
	if _, err := Open(ctx, dir+"/absent.db", Options{ReadOnly: true}); CodeOf(err) != Invalid {
		t.Errorf("absent, read only: %v", err)
	}
	if _, err := os.Stat(dir + "/absent.db"); err == nil {
		t.Error("opening read only made a file")
	}
	if db, err := sql.Open("sqlite", fileURI(other)); err == nil {
		var n int
		if err := db.QueryRow(`SELECT count(*) FROM sqlite_schema`).Scan(&n); err != nil || n != 1 {
			t.Errorf("the other program's file was changed: %d %v", n, err)
		}
		db.Close()
	}
}

func TestOpenAgainAndOddNames(t *testing.T) {
	path := t.TempDir() + "/a b?c#d%20é.db"
	for i := range 2 {
		s, err := Open(ctx, path, Options{})
		if err != nil {
			t.Fatal(err)
		}
		insert(t, s, row("Again", 1, 2, 1.2+float64(i)))
		rows, err := s.Rows(ctx, Filter{})
		if err != nil || len(rows) != i+1 {
			t.Fatal(len(rows), err)
		}
		s.Close()
	}
	if _, err := os.Stat(path); err != nil {
		t.Error(err)
	}
}

func TestReadOnly(t *testing.T) {
	path := t.TempDir() + "/c.db"
	s, err := Open(ctx, path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	insert(t, s, row("One", 1, 2, 1.2))
	s.Close()
	s, err = Open(ctx, path, Options{ReadOnly: true})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	if rows, err := s.Rows(ctx, Filter{}); err != nil || len(rows) != 1 {
		t.Error(rows, err)
	}
	if err := s.InsertRows(ctx, []Row{row("Two", 1, 2, 1.2)}, nil, 0, ""); CodeOf(err) != Forbidden {
		t.Error(err)
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}
