package catalogue

import (
	"testing"
)

func TestOpenInsertRead(t *testing.T) {
	s := open(t)
	in := row("Ørsted Böhm Channel", -12.25, 170.5, 1.62)
	in.Notes = InventedMark + " More."
	rows := insert(t, s, in, row("Second", 1, 2, 1.1))
	if rows[0].System != "orsted-bohm-channel" || rows[0].Measurement != "m000001" {
		t.Fatalf("got %q %q", rows[0].System, rows[0].Measurement)
	}
	got, err := s.Rows(ctx, Filter{})
	if err != nil || len(got) != 2 {
		t.Fatal(len(got), err)
	}
	if d := Diff(&rows[0], &got[0]); len(d) > 0 {
		t.Errorf("stored row differs: %v", d)
	}
	if !got[0].Invented || got[1].Invented {
		t.Error("invented must follow the notes")
	}
	if n, _ := s.Invented(ctx); n != 1 {
		t.Errorf("invented = %d", n)
	}
	systems, total, err := s.Systems(ctx, Filter{})
	if err != nil || total != 2 || len(systems) != 2 || systems[1].Name != "Second" {
		t.Fatal(systems, total, err)
	}
	d, err := s.System(ctx, "second")
	if err != nil || len(d.History) != 2 {
		t.Fatalf("%+v %v", d, err)
	}
	if _, err := s.System(ctx, "none"); CodeOf(err) != NotFound {
		t.Error(err)
	}
	if _, err := s.Facets(ctx, Filter{Text: "böhm"}); err != nil {
		t.Error(err)
	}
}
