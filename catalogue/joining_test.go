package catalogue

import (
	"context"
	"errors"
	"strings"
	"testing"
	"time"
)

func openRegistration(t testing.TB, s *Store) {
	t.Helper()
	if _, err := s.ChangeSettings(ctx, map[string]string{SettingRegistration: `"open"`}, 0, "opened"); err != nil {
		t.Fatal(err)
	}
}

func TestInvitationMakesOneAccount(t *testing.T) {
	s := open(t)
	now := time.Date(2031, 3, 1, 12, 0, 0, 0, time.UTC)
	s.now = func() time.Time { return now }
	kit, err := s.AddAccount(ctx, "kit", "Kit Fathom", "keeper", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	cy, err := s.AddAccount(ctx, "cy", "", "curator", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.Invite(ctx, cy.ID, "curator", "", 7); CodeOf(err) != Forbidden {
		t.Errorf("a curator invites: %v", err)
	}
	for _, days := range []int{0, -1, LongestInvitation + 1} {
		if _, err := s.Invite(ctx, kit.ID, "curator", "", days); CodeOf(err) != Invalid {
			t.Errorf("%d days: %v", days, err)
		}
	}
	token, err := s.Invite(ctx, kit.ID, "curator", "the new one", 7)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.UseInvitation(ctx, token, "two words", "", "ebb and flood 42"); CodeOf(err) != Invalid {
		t.Errorf("a wrong name: %v", err)
	}
	if _, err := s.UseInvitation(ctx, token, "cy", "Another", "ebb and flood 42"); CodeOf(err) != Conflict {
		t.Errorf("a name that is taken: %v", err)
	}
	a, err := s.UseInvitation(ctx, token, "dee", "D. Lead", "ebb and flood 42")
	if err != nil || a.Role != "curator" || a.Waiting {
		t.Fatalf("%+v, %v", a, err)
	}
	if _, err := s.UseInvitation(ctx, token, "eff", "", "ebb and flood 42"); CodeOf(err) != Forbidden {
		t.Errorf("used twice: %v", err)
	}
	late, err := s.Invite(ctx, kit.ID, "contributor", "", 7)
	if err != nil {
		t.Fatal(err)
	}
	back, err := s.Invite(ctx, kit.ID, "keeper", "", 7)
	if err != nil {
		t.Fatal(err)
	}
	list, err := s.Invitations(ctx, 10)
	if err != nil || len(list) != 3 || list[2].Name != "dee" || list[2].Note != "the new one" || list[2].By != "Kit Fathom" || !list[1].Open(now) {
		t.Fatalf("%+v, %v", list, err)
	}
	if err := s.EndInvitation(ctx, list[0].ID, kit.ID); err != nil {
		t.Fatal(err)
	}
	if err := s.EndInvitation(ctx, list[2].ID, kit.ID); CodeOf(err) != NotFound {
		t.Errorf("a used one is taken back: %v", err)
	}
	if _, err := s.Invitation(ctx, back); CodeOf(err) != Forbidden {
		t.Errorf("taken back: %v", err)
	}
	now = now.AddDate(0, 0, 7)
	if _, err := s.Invitation(ctx, late); CodeOf(err) != Forbidden {
		t.Errorf("after its last day: %v", err)
	}
	if _, err := s.Invitation(ctx, ""); CodeOf(err) != Forbidden {
		t.Errorf("no token: %v", err)
	}
}

func TestRegisteredPersonWaits(t *testing.T) {
	s := open(t)
	cy, err := s.AddAccount(ctx, "cy", "", "curator", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.Register(ctx, "ann", "Ann", "Northern Survey", "ebb and flood 42"); CodeOf(err) != Forbidden {
		t.Errorf("while closed: %v", err)
	}
	openRegistration(t, s)
	a, err := s.Register(ctx, "cy", "Another C.", "Northern Survey", "ebb and flood 42")
	if err != nil || !strings.HasPrefix(a.Name, "cy-") || len(a.Name) != 7 {
		t.Fatalf("%+v, %v", a, err)
	}
	for want, try := range map[string]func() error{
		"about":  func() error { _, err := s.Register(ctx, "b", "B", " ", "ebb and flood 42"); return err },
		"credit": func() error { _, err := s.Register(ctx, "b", "", "x", "ebb and flood 42"); return err },
		"name": func() error {
			_, err := s.Register(ctx, strings.Repeat("b", 51), "B", "x", "ebb and flood 42")
			return err
		},
		"password": func() error { _, err := s.Register(ctx, "b", "B", "x", "short"); return err },
	} {
		var e *Error
		if err := try(); CodeOf(err) != Invalid || !errors.As(err, &e) || e.Field != want {
			t.Errorf("%s: %v", want, err)
		}
	}
	sub := Submission{Row: row("Loom", 10, 20, 1.5), Overrides: map[string]string{}}
	if _, err := s.SaveDraft(ctx, a.ID, sub); err != nil {
		t.Errorf("a draft: %v", err)
	}
	if _, err := s.Submit(ctx, a.ID, sub); CodeOf(err) != Forbidden {
		t.Errorf("sent while waiting: %v", err)
	}
	if _, err := s.FreezeAnalysis(ctx, Analysis{Title: "Mine", Digest: strings.Repeat("0", 64)}, a.ID); CodeOf(err) != Forbidden {
		t.Errorf("froze an analysis while waiting: %v", err)
	}
	if err := s.DecideRegistration(ctx, a.ID, a.ID, true, ""); CodeOf(err) != Forbidden {
		t.Errorf("lets themselves in: %v", err)
	}
	if n, err := s.CountRegistrations(ctx); n != 1 || err != nil {
		t.Errorf("%d wait, %v", n, err)
	}
	if err := s.DecideRegistration(ctx, a.ID, cy.ID, true, "known to the group"); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Submit(ctx, a.ID, sub); err != nil {
		t.Errorf("let in: %v", err)
	}
	if err := s.DecideRegistration(ctx, a.ID, cy.ID, false, ""); CodeOf(err) != Conflict {
		t.Errorf("decided twice: %v", err)
	}
	b, err := s.Register(context.Background(), "bo", "Bo", "Northern Survey", "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	if err := s.DecideRegistration(ctx, b.ID, cy.ID, false, "nobody knows them"); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Authenticate(ctx, b.Name, "ebb and flood 42"); CodeOf(err) != Forbidden {
		t.Errorf("refused and still gets in: %v", err)
	}
	list, err := s.Registrations(ctx, 10)
	if err != nil || len(list) != 2 || list[0].State != "refused" || list[0].Why != "nobody knows them" || list[1].By != "cy" || list[1].Drafts == 0 {
		t.Errorf("%+v, %v", list, err)
	}
}
