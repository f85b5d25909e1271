package catalogue

import (
	"context"
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"
)

// people makes an owner, a friend, a stranger and a curator.
func people(t *testing.T, s *Store) (owner, friend, stranger, curator int64) {
	t.Helper()
	var ids []int64
	for _, p := range [][2]string{{"olive", "contributor"}, {"finn", "contributor"}, {"stray", "contributor"}, {"cora", "curator"}} {
		a, err := s.AddAccount(ctx, p[0], "", p[1], "ebb and flood 42")
		if err != nil {
			t.Fatal(err)
		}
		ids = append(ids, a.ID)
	}
	return ids[0], ids[1], ids[2], ids[3]
}

// as is what an account sees.
func as(t *testing.T, s *Store, account int64) context.Context {
	t.Helper()
	c, err := s.AsSeenBy(ctx, account)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// idsSeen lists the measurements under a filter as a context sees them.
func idsSeen(t *testing.T, s *Store, c context.Context, f Filter) []string {
	t.Helper()
	rows, err := s.Rows(c, f)
	if err != nil {
		t.Fatal(err)
	}
	var ids []string
	for _, r := range rows {
		if r.Private != strings.HasPrefix(r.Measurement, PrivatePrefix) {
			t.Errorf("%s: private %v", r.Measurement, r.Private)
		}
		ids = append(ids, r.Measurement)
	}
	return ids
}

func wantIDs(t *testing.T, what string, got []string, want ...string) {
	t.Helper()
	if !slices.Equal(got, want) {
		t.Errorf("%s: %v, want %v", what, got, want)
	}
}

// exact is a row with a place, ends, words and a line of its own.
func exact(name string) Submission {
	r := row(name, 12.3456, -40.6789, 1.77)
	r.StartLatitudeDeg, r.StartLongitudeDeg, r.EndLatitudeDeg, r.EndLongitudeDeg = Num(12.31), Num(-40.61), Num(12.37), Num(-40.71)
	r.Reach, r.WaterDepthM, r.Notes, r.Source = "zanzibar reach", Num(3210), "quokka notes", "Invented Thesis of quokka (2031)"
	return Submission{Row: r, Centreline: `{"type":"LineString","coordinates":[[-40.61,12.31],[-40.71,12.37]]}`, CentrelineSinuosities: []float64{1.5, 1.77}}
}

func TestPrivateRowIsSeenByItsPeopleOnly(t *testing.T) {
	s := open(t)
	owner, friend, stranger, curator := people(t, s)
	insert(t, s, row("Known Channel", 5, 6, 1.2))
	state, err := s.State(ctx)
	if err != nil {
		t.Fatal(err)
	}
	sub := exact("Quokka Channel")
	sub.Audience.People = "finn"
	id, err := s.KeepPrivate(ctx, owner, sub)
	if err != nil {
		t.Fatal(err)
	}
	mark := fmt.Sprint(PrivatePrefix, id)
	second := Submission{Row: row("Quokka Channel", 12.4, -40.7, 1.9)}
	second.Row.Reach = "lower"
	id2, err := s.KeepPrivate(ctx, owner, second)
	if err != nil {
		t.Fatal(err)
	}
	mark2 := fmt.Sprint(PrivatePrefix, id2)
	third := Submission{Row: row("Known Channel", 5, 6, 1.9)} // of a known system and a known source
	third.Row.Reach = "upper"
	id3, err := s.KeepPrivate(ctx, owner, third)
	if err != nil {
		t.Fatal(err)
	}
	mark3 := fmt.Sprint(PrivatePrefix, id3)

	wantIDs(t, "everybody", idsSeen(t, s, ctx, Filter{}), "m000001")
	wantIDs(t, "stranger", idsSeen(t, s, as(t, s, stranger), Filter{}), "m000001")
	wantIDs(t, "curator", idsSeen(t, s, as(t, s, curator), Filter{}), "m000001")
	wantIDs(t, "friend", idsSeen(t, s, as(t, s, friend), Filter{}), mark, "m000001")
	mine := as(t, s, owner)
	wantIDs(t, "owner", idsSeen(t, s, mine, Filter{}), mark3, mark2, mark, "m000001")
	wantIDs(t, "owner as everybody", idsSeen(t, s, AsEverybody(mine), Filter{}), "m000001")
	if now, err := s.State(ctx); err != nil || now != state {
		t.Errorf("a private row shows in the state of the catalogue: %q, was %q (%v)", now, state, err)
	}

	// Every way of finding it: words, box, range, choice, order.
	box := BBox{-41, 12, -40, 13}
	for what, f := range map[string]Filter{
		"text": {Text: "zanzibar"}, "prefix": {Text: "quok zanz"}, "box": {BBox: &box, SinuosityMax: Num(1.8)}, "source": {Choices: map[string][]string{"source": {"Invented Thesis of quokka (2031)"}}},
	} {
		wantIDs(t, what+" of the owner", idsSeen(t, s, mine, f), mark)
		wantIDs(t, what+" of the friend", idsSeen(t, s, as(t, s, friend), f), mark)
		wantIDs(t, what+" of everybody", idsSeen(t, s, ctx, f))
		wantIDs(t, what+" of a stranger", idsSeen(t, s, as(t, s, stranger), f))
	}
	if ids := idsSeen(t, s, mine, Filter{Sort: "-latitude_deg"}); ids[0] != mark2 || ids[1] != mark {
		t.Error("sorted:", ids)
	}
	page, total, err := s.Systems(mine, Filter{Sort: "system"})
	if err != nil || total != 2 || len(page[0].Measurements) != 2 || len(page[1].Measurements) != 2 {
		t.Errorf("systems of the owner: %d %+v %v", total, page, err)
	}
	own := page[1].Slug
	if own != mark+"-quokka-channel" {
		t.Error("slug:", own)
	}
	d, err := s.System(mine, own)
	if err != nil || len(d.Measurements) != 2 || len(d.Centrelines) != 1 || len(d.Sources) != 2 || len(d.History) != 0 {
		t.Fatalf("page of the owner: %+v %v", d, err)
	}
	if i := slices.IndexFunc(d.Measurements, func(r Row) bool { return r.Measurement == mark }); i < 0 || !slices.Equal(d.Measurements[i].WindowSinuosities, []float64{1.5, 1.77}) {
		t.Error("windows:", d.Measurements)
	}
	for _, c := range []context.Context{ctx, as(t, s, stranger), as(t, s, curator)} {
		if _, err := s.System(c, own); CodeOf(err) != NotFound {
			t.Errorf("system of others: %v", err)
		}
		if lines, total, err := s.LinesIn(c, Filter{}, BBox{-180, -90, 180, 90}, 10); err != nil || total != 0 || len(lines) != 0 {
			t.Error("lines of others:", total, err)
		}
	}
	if lines, total, err := s.LinesIn(mine, Filter{}, box, 10); err != nil || total != 1 || lines[0].System != own {
		t.Errorf("lines of the owner: %d %+v %v", total, lines, err)
	}
	kinds := func(c context.Context) int {
		facets, err := s.Facets(c, Filter{})
		if err != nil {
			t.Fatal(err)
		}
		return facets[0].Values[0].Count
	}
	if a, b, c := kinds(ctx), kinds(mine), kinds(ctx); a != 1 || b != 2 || c != 1 {
		t.Errorf("facets: everybody %d, owner %d, everybody again %d", a, b, c)
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}

	// No release holds it, and a person no longer named no longer sees it.
	if _, err := s.Freeze(mine, NewRelease{Name: "r1", Title: "T", Program: "test"}); err != nil {
		t.Fatal(err)
	}
	wantIDs(t, "release", idsSeen(t, s, mine, Filter{Release: "r1"}), "m000001")
	before := ViewKey(as(t, s, friend))
	sub.ID, sub.Audience.People = id, ""
	if _, err := s.KeepPrivate(ctx, owner, sub); err != nil {
		t.Fatal(err)
	}
	wantIDs(t, "friend no more", idsSeen(t, s, as(t, s, friend), Filter{}), "m000001")
	if before == "" || ViewKey(as(t, s, friend)) != "" {
		t.Error("the key of the friend's view:", before)
	}
	if err := s.Withdraw(ctx, id3, owner); err != nil {
		t.Fatal(err)
	}
	wantIDs(t, "withdrawn", idsSeen(t, s, as(t, s, owner), Filter{}), mark2, mark, "m000001")
}

func TestPrivateRowIsSentAndAccepted(t *testing.T) {
	s := open(t)
	owner, friend, _, curator := people(t, s)
	sub := exact("Quokka Channel")
	sub.Audience.People = "finn"
	id, err := s.KeepPrivate(ctx, owner, sub)
	if err != nil {
		t.Fatal(err)
	}
	second := Submission{Row: row("Quokka Channel", 12.4, -40.7, 1.9)}
	second.Row.Reach = "lower"
	id2, err := s.KeepPrivate(ctx, owner, second)
	if err != nil {
		t.Fatal(err)
	}
	sub.ID, sub.Row.Sinuosity = id, Num(1.78)
	if _, err := s.Submit(ctx, owner, sub); err != nil {
		t.Fatal(err)
	}
	if rows, err := s.Rows(as(t, s, friend), Filter{}); err != nil || len(rows) != 1 || rows[0].Sinuosity.V != 1.78 {
		t.Errorf("while it waits: %+v %v", rows, err)
	}
	if err := s.Accept(ctx, id, curator, ""); err != nil {
		t.Fatal(err)
	}
	wantIDs(t, "everybody", idsSeen(t, s, ctx, Filter{}), "m000001")
	wantIDs(t, "owner", idsSeen(t, s, as(t, s, owner), Filter{}), fmt.Sprint(PrivatePrefix, id2), "m000001")
	// The other private row of the system follows it.
	if d, err := s.System(as(t, s, owner), "quokka-channel"); err != nil || len(d.Measurements) != 2 {
		t.Errorf("%+v %v", d, err)
	}
	if _, err := s.System(ctx, fmt.Sprint(PrivatePrefix, id, "-quokka-channel")); CodeOf(err) != NotFound {
		t.Error(err)
	}
}

func TestPrivateRowsRefuse(t *testing.T) {
	s := open(t)
	owner, _, stranger, _ := people(t, s)
	known := insert(t, s, row("Known Channel", 5, 6, 1.2))[0]
	id, err := s.KeepPrivate(ctx, owner, exact("Quokka Channel"))
	if err != nil {
		t.Fatal(err)
	}
	change := Submission{Row: known}
	change.Row.Sinuosity = Num(1.3)
	later := func(until string) Submission {
		x := exact("Other Channel")
		x.Audience = Audience{Kind: AudienceLater, Until: until}
		return x
	}
	for what, try := range map[string]struct {
		field string
		code  Code
		do    func() error
	}{
		"nobody": {"", Forbidden, func() error { _, err := s.KeepPrivate(ctx, 0, exact("X")); return err }},
		"no sinuosity": {"sinuosity", Invalid, func() error {
			x := exact("X")
			x.Row.Sinuosity = Num(0.5)
			_, err := s.KeepPrivate(ctx, owner, x)
			return err
		}},
		"a change": {"audience", Invalid, func() error { _, err := s.KeepPrivate(ctx, owner, change); return err }},
		"unknown name": {"people", Invalid, func() error {
			x := exact("X")
			x.Audience.People = "nobody-here"
			_, err := s.KeepPrivate(ctx, owner, x)
			return err
		}},
		"another's": {"", Forbidden, func() error { x := exact("X"); x.ID = id; _, err := s.KeepPrivate(ctx, stranger, x); return err }},
		"no day":    {"until", Invalid, func() error { _, err := s.Submit(ctx, owner, later("31.1.2027")); return err }},
		"a day ago": {"until", Invalid, func() error { _, err := s.Submit(ctx, owner, later("2001-01-01")); return err }},
		"a kind": {"audience", Invalid, func() error {
			x := exact("X")
			x.Audience.Kind = "friends"
			_, err := s.Submit(ctx, owner, x)
			return err
		}},
		"an id": {"measurement", Invalid, func() error {
			r := row("X", 1, 2, 1.3)
			r.Measurement = fmt.Sprint(PrivatePrefix, id)
			return s.InsertRows(ctx, []Row{r}, nil, 0, "")
		}},
		"to publish": {"", Conflict, func() error { return s.Publish(ctx, id, owner) }},
		"a stranger": {"", Forbidden, func() error { return s.Publish(ctx, id, stranger) }},
	} {
		err := try.do()
		if e, ok := err.(*Error); !ok || e.Code != try.code || e.Field != try.field {
			t.Errorf("%s: %#v", what, err)
		}
	}
	wantIDs(t, "everybody", idsSeen(t, s, ctx, Filter{}), "m000001")
	// A file of one's own rows cannot become a change of what is private.
	report, err := s.Import(ctx, strings.NewReader("measurement,system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source\nprivate-1,A,1,2,1.5,peak,thalweg,S\n"), ImportOptions{Publish: true})
	if err != nil || report.Stored || len(report.Problems) != 1 || !strings.Contains(report.Problems[0].Message, "private row") {
		t.Errorf("%+v %v", report, err)
	}
}

// embargoed keeps a row of the owner under embargo.
func embargoed(t *testing.T, s *Store, owner, curator int64, a Audience) int64 {
	t.Helper()
	sub := exact("Quokka Channel")
	sub.Audience = a
	sub.Overrides = map[string]string{"odd": "because of zanzibar"}
	id, err := s.Submit(ctx, owner, sub)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Accept(ctx, id, curator, ""); err != nil {
		t.Fatal(err)
	}
	return id
}

func TestEmbargoEndsOnItsDay(t *testing.T) {
	s := open(t)
	now := time.Date(2031, 3, 4, 12, 0, 0, 0, time.UTC)
	s.now = func() time.Time { return now }
	owner, friend, _, curator := people(t, s)
	insert(t, s, row("Known Channel", 5, 6, 1.2))
	before, _ := s.State(ctx)
	id := embargoed(t, s, owner, curator, Audience{Kind: AudienceLater, Until: "2031-03-06", People: "finn"})
	mark := fmt.Sprint(PrivatePrefix, id)
	if after, _ := s.State(ctx); after != before {
		t.Error("accepting a hidden row shows in the state of the catalogue")
	}
	lift := func(want int) {
		t.Helper()
		if n, err := s.Lift(ctx); n != want || err != nil {
			t.Errorf("lifted %d (%v), want %d", n, err, want)
		}
	}
	lift(0)
	wantIDs(t, "everybody", idsSeen(t, s, ctx, Filter{}), "m000001")
	wantIDs(t, "curator", idsSeen(t, s, as(t, s, curator), Filter{}), "m000001")
	wantIDs(t, "friend", idsSeen(t, s, as(t, s, friend), Filter{}), mark, "m000001")
	if list, err := s.Embargoes(ctx); err != nil || len(list) != 1 || list[0].Until != "2031-03-06" || !slices.Equal(list[0].People, []string{"finn"}) {
		t.Errorf("%+v %v", list, err)
	}
	now = time.Date(2031, 3, 5, 23, 59, 59, 0, time.UTC)
	lift(0)
	now = now.Add(time.Second)
	lift(1)
	lift(0)
	wantIDs(t, "everybody after", idsSeen(t, s, ctx, Filter{}), "m000001", "m000002")
	wantIDs(t, "owner after", idsSeen(t, s, as(t, s, owner), Filter{}), "m000001", "m000002")
	if after, _ := s.State(ctx); after == before {
		t.Error("the end of the embargo does not show in the state")
	}
	d, err := s.System(ctx, "quokka-channel")
	if err != nil || len(d.Centrelines) != 1 || d.Measurements[0].LatitudeDeg.V != 12.3456 || d.Measurements[0].Reach != "zanzibar reach" {
		t.Errorf("%+v %v", d, err)
	}
	if !slices.ContainsFunc(d.History, func(v Revision) bool { return v.Why == "the embargo ended" && v.Who == "olive" }) {
		t.Error("history:", d.History)
	}
}

func TestEmbargoWithARoundedPlace(t *testing.T) {
	s := open(t)
	owner, _, stranger, curator := people(t, s)
	id := embargoed(t, s, owner, curator, Audience{Kind: AudienceLater, Coarse: true})
	rows, err := s.Rows(ctx, Filter{})
	if err != nil || len(rows) != 1 {
		t.Fatal(rows, err)
	}
	r := rows[0]
	if !r.Coarse || r.Private || r.Measurement != "m000001" || r.LatitudeDeg.V != 12 || r.LongitudeDeg.V != -41 || r.StartLatitudeDeg.Valid || r.EndLongitudeDeg.Valid || r.WaterDepthM.Valid || r.Reach != "" || len(r.WindowSinuosities) > 0 {
		t.Errorf("what others see: %+v", r)
	}
	if r.Sinuosity.V != 1.77 || !strings.HasPrefix(r.Notes, CoarseMark) {
		t.Errorf("what others see: %+v", r)
	}
	// Filters, order, words and history answer from the rounded row.
	exactBox, roundedBox := BBox{-40.7, 12.3, -40.6, 12.4}, BBox{-41.1, 11.9, -40.9, 12.1}
	for what, x := range map[string]struct {
		f    Filter
		want int
	}{
		"the exact box": {Filter{BBox: &exactBox}, 0}, "the rounded box": {Filter{BBox: &roundedBox}, 1}, "latitude": {Filter{LatMin: Num(12.3), LatMax: Num(12.4)}, 0},
		"|latitude|": {Filter{AbsLatMin: Num(12.3)}, 0}, "words of the reach": {Filter{Text: "zanzibar"}, 0}, "words of the notes": {Filter{Text: "quokka notes"}, 0},
		"its name": {Filter{Text: "quokka channel"}, 1},
	} {
		if got := len(idsSeen(t, s, as(t, s, stranger), x.f)); got != x.want {
			t.Errorf("%s: %d rows, want %d", what, got, x.want)
		}
	}
	d, err := s.System(ctx, "quokka-channel")
	if err != nil || len(d.Centrelines) != 0 {
		t.Fatalf("%+v %v", d, err)
	}
	if text := fmt.Sprintf("%+v", d); strings.Contains(text, "zanzibar") || strings.Contains(text, "12.3") || strings.Contains(text, "40.6") {
		t.Error("the exact place shows:", text)
	}
	mine := as(t, s, owner)
	wantIDs(t, "owner", idsSeen(t, s, mine, Filter{BBox: &exactBox}), fmt.Sprint(PrivatePrefix, id))
	wantIDs(t, "owner, all", idsSeen(t, s, mine, Filter{}), fmt.Sprint(PrivatePrefix, id))
	if err := s.TakeBack(ctx, id, owner); CodeOf(err) != Conflict {
		t.Error("taken back:", err)
	}

	// A curator mends the grade meanwhile; at the end the place is the exact
	// one and the grade the curator's.
	mended := r
	mended.Grade = "surveyed"
	fix, err := s.Submit(ctx, curator, Submission{Row: mended})
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Accept(ctx, fix, curator, ""); err != nil {
		t.Fatal(err)
	}
	if err := s.Publish(ctx, id, stranger); CodeOf(err) != Forbidden {
		t.Error("published by a stranger:", err)
	}
	if err := s.Publish(ctx, id, owner); err != nil {
		t.Fatal(err)
	}
	rows, err = s.Rows(ctx, Filter{})
	if err != nil || len(rows) != 1 || rows[0].Measurement != "m000001" || rows[0].LatitudeDeg.V != 12.3456 || rows[0].Grade != "surveyed" || rows[0].Coarse || len(rows[0].WindowSinuosities) != 2 {
		t.Errorf("published: %+v %v", rows, err)
	}
	wantIDs(t, "owner", idsSeen(t, s, as(t, s, owner), Filter{}), "m000001")
}

func TestEmbargoIsChangedAndTakenBack(t *testing.T) {
	s := open(t)
	owner, friend, stranger, curator := people(t, s)
	id := embargoed(t, s, owner, curator, Audience{Kind: AudienceLater, Until: "2900-01-01"})
	if err := s.SetEmbargo(ctx, id, stranger, "", ""); CodeOf(err) != NotFound {
		t.Error(err)
	}
	if err := s.SetEmbargo(ctx, id, owner, "2001-01-01", ""); CodeOf(err) != Invalid {
		t.Error(err)
	}
	if err := s.SetEmbargo(ctx, id, owner, "", "finn, finn; olive"); err != nil {
		t.Fatal(err)
	}
	h, err := s.HiddenRow(ctx, id)
	if err != nil || h.Until != "" || !slices.Equal(h.People, []string{"finn"}) {
		t.Errorf("%+v %v", h, err)
	}
	wantIDs(t, "friend", idsSeen(t, s, as(t, s, friend), Filter{}), fmt.Sprint(PrivatePrefix, id))
	if err := s.TakeBack(ctx, id, owner); err != nil {
		t.Fatal(err)
	}
	sub, err := s.Submission(ctx, id)
	if err != nil || sub.State != "draft" {
		t.Errorf("%+v %v", sub, err)
	}
	if list, err := s.Embargoes(ctx); err != nil || len(list) != 0 {
		t.Error(list, err)
	}
	wantIDs(t, "owner", idsSeen(t, s, as(t, s, owner), Filter{}), fmt.Sprint(PrivatePrefix, id))
}

// A row whose embargo ends but which cannot join goes back with the reason.
func TestEmbargoThatCannotEnd(t *testing.T) {
	s := open(t)
	now := time.Date(2031, 3, 4, 12, 0, 0, 0, time.UTC)
	s.now = func() time.Time { return now }
	owner, _, _, curator := people(t, s)
	id := embargoed(t, s, owner, curator, Audience{Kind: AudienceLater, Until: "2031-03-05"})
	for i := range 2 { // two systems of its name: which one is it of?
		r := row("Quokka Channel", 50, 60, 1.2)
		r.System = fmt.Sprint("quokka-", i)
		insert(t, s, r)
	}
	now = now.AddDate(0, 0, 1)
	if n, err := s.Lift(ctx); n != 0 || err != nil {
		t.Error(n, err)
	}
	sub, err := s.Submission(ctx, id)
	if err != nil || sub.State != "returned" || !strings.Contains(sub.Comment, "several systems named") {
		t.Errorf("%+v %v", sub, err)
	}
	wantIDs(t, "owner", idsSeen(t, s, as(t, s, owner), Filter{Text: "zanzibar"}), fmt.Sprint(PrivatePrefix, id))
	wantIDs(t, "everybody", idsSeen(t, s, ctx, Filter{}), "m000001", "m000002")
}
