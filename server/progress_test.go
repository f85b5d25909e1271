package main

import (
	"net/http"
	"net/url"
	"strings"
	"testing"
)

// slowQuestion takes the program some seconds: the broken line and two quantile lines with as many
// resamples as are allowed.
const slowQuestion = "model=broken_line:abs_latitude&model=quantile_50:abs_latitude&model=quantile_10:abs_latitude&response=any&scale=raw&cluster=parent_deposit&resamples=100000&permutations=9999&seed=11"

// TestProgress: a person sees how far a long fit has come and can cancel it; a
// program waits for the answer.
func TestProgress(t *testing.T) {
	v := newReferenceSite(t).visitor()
	ask := func() *answer {
		r, err := http.NewRequest("GET", v.base+"/regression?"+slowQuestion, nil)
		if err != nil {
			t.Fatal(err)
		}
		r.Header.Set("Sec-Fetch-Mode", "navigate") // as browsers do
		return v.do(r)
	}
	a := ask()
	a.is(http.StatusAccepted)
	if a.header.Get("Refresh") == "" || a.doc().Find("progress").Length() != 1 {
		t.Errorf("no progress is shown, or it does not ask again: %v", a.header)
	}
	// Others are served while it runs.
	v.get("/regression?model=linear:abs_latitude&scale=raw&resamples=99&permutations=99&seed=1").is(http.StatusOK)
	q, err := url.ParseQuery(slowQuestion)
	if err != nil {
		t.Fatal(err)
	}
	cancelled := v.post("/regression/cancel", q)
	cancelled.is(http.StatusOK).says("cancelled")
	if cancelled.doc().Find("select[name=model] option[selected][value='broken_line:abs_latitude']").Length() != 1 {
		t.Error("the settings were lost with the fit")
	}
	if a := v.post("/regression/cancel", url.Values{"model": {"cubic:depth"}}); a.status != http.StatusBadRequest || !strings.Contains(a.body, "cubic") {
		t.Errorf("cancelling nonsense: status %d", a.status)
	}
}
