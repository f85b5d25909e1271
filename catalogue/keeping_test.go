package catalogue

import (
	"bytes"
	"strings"
	"testing"
)

// An edit of the notes does not make a survey of an invented row.
func TestInventedStaysInvented(t *testing.T) {
	s := open(t)
	in := row("Drawn Channel", -12.25, 170.5, 1.62)
	in.Notes = InventedMark + " More."
	insert(t, s, in)
	var out bytes.Buffer
	if _, err := s.Export(ctx, &out, Filter{}); err != nil {
		t.Fatal(err)
	}
	edited := strings.Replace(out.String(), InventedMark+" More.", "seen by survey", 1)
	if edited == out.String() {
		t.Fatal("the export holds no mark to edit")
	}
	rep, err := s.Import(ctx, strings.NewReader(edited), ImportOptions{Publish: true})
	if err != nil {
		t.Fatal(err)
	}
	if rep.Stored || len(rep.Problems) != 1 || rep.Problems[0].Column != "notes" || rep.Problems[0].Line != 2 {
		t.Errorf("%+v", rep)
	}
	if n, _ := s.Invented(ctx); n != 1 {
		t.Errorf("invented rows = %d, want 1", n)
	}
}

// The only keeper stays one until there is another.
func TestLastKeeperStays(t *testing.T) {
	s := open(t)
	for _, name := range []string{"ann", "bea"} {
		role := map[string]string{"ann": "keeper", "bea": "contributor"}[name]
		if _, err := s.AddAccount(ctx, name, "", role, "a long enough word 7"); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.SetRole(ctx, "ann", "curator"); CodeOf(err) != Invalid {
		t.Errorf("the last keeper was let go: %v", err)
	}
	if err := s.SetRole(ctx, "bea", "keeper"); err != nil {
		t.Fatal(err)
	}
	if err := s.SetRole(ctx, "ann", "curator"); err != nil {
		t.Errorf("with another keeper: %v", err)
	}
}
