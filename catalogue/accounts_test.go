package catalogue

import (
	"strings"
	"sync"
	"testing"
	"time"
)

func account(t testing.TB, s *Store, name, role string) *Account {
	t.Helper()
	a, err := s.AddAccount(ctx, name, strings.ToUpper(name[:1])+name[1:]+" Invented", role, "correct horse "+name)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

func TestAccounts(t *testing.T) {
	s := open(t)
	a := account(t, s, "ada", "contributor")
	if _, err := s.AddAccount(ctx, "ADA", "", "curator", "another password"); CodeOf(err) != Conflict {
		t.Errorf("the same name in capitals: %v", err)
	}
	for _, c := range []struct{ name, credit, role, password, field string }{
		{"", "X", "curator", "long enough", "name"}, {"a b", "X", "curator", "long enough", "name"}, {"x", "X", "owner", "long enough", "role"},
		{"x", "X", "curator", "short", "password"}, {"x", "X", "curator", strings.Repeat("p", 600), "password"}, {"x", strings.Repeat("c", 201), "curator", "long enough", "credit"},
		{"x\x00", "X", "curator", "long enough", "name"},
	} {
		_, err := s.AddAccount(ctx, c.name, c.credit, c.role, c.password)
		if CodeOf(err) != Invalid || err.(*Error).Field != c.field || err.(*Error).Expected == "" {
			t.Errorf("%.20q: %v", c, err)
		}
	}
	got, err := s.Authenticate(ctx, " Ada", "correct horse ada")
	if err != nil || got.ID != a.ID || got.Credit != "Ada Invented" {
		t.Errorf("%+v %v", got, err)
	}
	refusals := map[string]bool{}
	for _, c := range [][2]string{{"ada", "wrong password"}, {"nobody", "wrong password"}, {"ada", ""}, {"ada", strings.Repeat("x", 1<<20)}} {
		_, err := s.Authenticate(ctx, c[0], c[1])
		if CodeOf(err) != Forbidden {
			t.Fatalf("%.20v: %v", c, err)
		}
		refusals[err.Error()] = true
	}
	if err := s.SetDisabled(ctx, "ada", true); err != nil {
		t.Fatal(err)
	}
	_, err = s.Authenticate(ctx, "ada", "correct horse ada")
	refusals[err.Error()] = true
	if len(refusals) != 1 {
		t.Errorf("refusals tell accounts apart: %v", refusals)
	}
	if err := s.SetRole(ctx, "nobody", "curator"); CodeOf(err) != NotFound {
		t.Error(err)
	}
	if err := s.SetPassword(ctx, "ada", "new password"); err != nil {
		t.Error(err)
	}
	_ = s.SetDisabled(ctx, "ada", false)
	if _, err := s.Authenticate(ctx, "ada", "new password"); err != nil {
		t.Error(err)
	}
	var hash string
	if err := s.r.QueryRow(`SELECT password_hash FROM accounts`).Scan(&hash); err != nil || !strings.HasPrefix(hash, "$argon2id$v=19$m=19456,t=2,p=1$") || strings.Contains(hash, "password") {
		t.Errorf("%q %v", hash, err)
	}
	if _, err := s.Account(ctx, 99); CodeOf(err) != NotFound {
		t.Error(err)
	}
}

// The cost of verifying is that of the stored parameters: names that do not
// exist are verified against parameters equal to those of new accounts.
func TestNobodyCostsTheSame(t *testing.T) {
	s := open(t)
	account(t, s, "ada", "contributor")
	var hash string
	if err := s.r.QueryRow(`SELECT password_hash FROM accounts`).Scan(&hash); err != nil {
		t.Fatal(err)
	}
	cost := func(h string) string {
		p := strings.Split(h, "$")
		return strings.Join(p[:4], "$") + " " + string(rune(len(p[4]))) + string(rune(len(p[5])))
	}
	if cost(hash) != cost(nobody) {
		t.Errorf("%q and %q cost different", hash, nobody)
	}
}

func TestHashingIsBounded(t *testing.T) {
	s := open(t)
	release1, _ := s.slot(ctx)
	release2, _ := s.slot(ctx)
	third := make(chan struct{})
	go func() {
		release, err := s.slot(ctx)
		if err == nil {
			release()
		}
		close(third)
	}()
	select {
	case <-third:
		t.Fatal("three at once")
	case <-time.After(20 * time.Millisecond):
	}
	release1()
	<-third
	release2()
}

func TestFirstRunToken(t *testing.T) {
	s := open(t)
	first, err := s.CreateFirstRunToken(ctx)
	if err != nil || len(first) < 30 {
		t.Fatal(first, err)
	}
	second, _ := s.CreateFirstRunToken(ctx)
	if ok, _ := s.FirstRunTokenValid(ctx, first); ok || first == second {
		t.Error("a new address replaces the last one")
	}
	if _, err := s.UseFirstRunToken(ctx, first, "eve", "Eve", "curator", "long enough"); CodeOf(err) != Forbidden {
		t.Error(err)
	}
	if _, err := s.UseFirstRunToken(ctx, second, "eve", "Eve", "curator", "short"); CodeOf(err) != Invalid {
		t.Error(err)
	}
	var wg sync.WaitGroup
	made := make(chan *Account, 4)
	for range 4 {
		wg.Go(func() {
			if a, err := s.UseFirstRunToken(ctx, second, "eve", "Eve", "curator", "long enough"); err == nil {
				made <- a
			}
		})
	}
	wg.Wait()
	if len(made) != 1 {
		t.Errorf("%d accounts made from one address", len(made))
	}
	if token, err := s.CreateFirstRunToken(ctx); token != "" || err != nil {
		t.Errorf("with an account there is no such address: %q %v", token, err)
	}
}

func TestSessions(t *testing.T) {
	s := open(t)
	now := time.Date(2030, 1, 2, 3, 4, 5, 0, time.UTC)
	s.now = func() time.Time { return now }
	if _, found, err := s.SessionFind(ctx, "t1"); found || err != nil {
		t.Error(found, err)
	}
	for token, life := range map[string]time.Duration{"t1": time.Hour, "t2": time.Minute} {
		if err := s.SessionCommit(ctx, token, []byte("data of "+token), now.Add(life)); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.SessionCommit(ctx, "t1", []byte("more"), now.Add(time.Hour)); err != nil {
		t.Fatal(err)
	}
	if data, found, err := s.SessionFind(ctx, "t1"); string(data) != "more" || !found || err != nil {
		t.Error(string(data), found, err)
	}
	now = now.Add(2 * time.Minute)
	if _, found, _ := s.SessionFind(ctx, "t2"); found {
		t.Error("an ended session was found")
	}
	if err := s.CleanSessions(ctx); err != nil {
		t.Fatal(err)
	}
	var n int
	var clear bool
	if err := s.r.QueryRow(`SELECT count(*), max(token_hash = CAST('t1' AS BLOB)) FROM sessions`).Scan(&n, &clear); err != nil || n != 1 || clear {
		t.Errorf("%d sessions left, token in the clear: %v, %v", n, clear, err)
	}
	if err := s.SessionDelete(ctx, "t1"); err != nil {
		t.Fatal(err)
	}
	if _, found, _ := s.SessionFind(ctx, "t1"); found {
		t.Error("a deleted session was found")
	}
	if rev, _ := s.Revision(ctx); rev != 0 {
		t.Error("sessions are no change of the catalogue")
	}
}
