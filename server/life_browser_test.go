package main

import (
	"net/http"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"
)

// The whole life of a record in two browsers: draft, submit, return, amend,
// accept, edit, conflict, restore, release, cite.
func TestBrowserLifeOfARecord(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	s.person("bea", "contributor")
	s.person("cy", "curator")
	ann, cy := s.browse(t), s.browse(t, "status of 422", "status of 409")
	ann.signIn("ann")
	cy.signIn("cy")

	// Draft; the source comes from a pasted entry.
	ann.goTo("/contribute")
	fields := goodRecord()
	delete(fields, "source")
	ann.fill(fields)
	ann.do(chromedp.Click("#group-reference summary"))
	ann.fill(map[string]string{"reference": "@article{m, author={Marlow, A.}, title={Invented soundings}, journal={J. Invented Sounding}, year={2031}, volume={4}, pages={12}, doi={10.5555/inv.31}}"})
	ann.do(chromedp.Evaluate[chromedp.Void](`document.getElementById("reference").dispatchEvent(new Event("paste"))`))
	waitFor(t, ann.ctx, `document.getElementById("source").value.includes("Marlow") && document.getElementById("source_doi").value === "10.5555/inv.31"`)
	ann.press("button[value=save]")
	ann.says("The draft is saved", "only you see it")
	mine := ann.path()

	// Submit, return, amend.
	ann.press("button.primary[value=submit]")
	ann.says("Sent.", "It waits for a curator")
	cy.goTo("/review")
	cy.press("table.data tbody th a")
	cy.says("A new system with its first measurement", "Marlow", "2031")
	review := cy.path()
	cy.do(chromedp.SetValue("#comment", "Which page?"))
	cy.press("button[value=return]")
	cy.says("is returned to its contributor", "Nothing waits")
	ann.goTo(mine)
	ann.says("Returned to you by a curator", "Which page?")
	ann.fill(map[string]string{"source_locator": "p. 14", "message": "Page 14."})
	ann.press("button.primary[value=submit]")
	ann.says("Sent.", "Page 14.")

	// Accept.
	cy.goTo(review)
	cy.says("p. 14", "Which page?", "Page 14.")
	cy.press("button[value=accept]")
	cy.says("is accepted and part of the catalogue")
	ann.goTo(mine)
	ann.says("Accepted: this record is part of the catalogue", "m000001")

	// Two edits of one record from the same base.
	edit := func(tab *tab, values map[string]string) {
		t.Helper()
		tab.goTo("/contribute?measurement=m000001")
		tab.fill(values)
	}
	bea := s.browse(t)
	bea.signIn("bea")
	edit(ann, map[string]string{"sinuosity": "1.7"})
	edit(bea, map[string]string{"sinuosity": "1.8", "window_m": "4000"})
	ann.press("button.primary[value=submit]")
	bea.press("button.primary[value=submit]")
	cy.goTo("/review")
	cy.says("2 records wait")
	cy.press("table.data tbody th a")
	cy.says("1 field, from ann")
	cy.press("button[value=accept]")

	// The conflict: both versions, one choice for each field.
	cy.says("changed since")
	cy.press("table.data tbody th a")
	cy.says("The record was changed after this was written", "1.62", "1.7", "1.8")
	if status := cy.press("button[value=settle]"); status != http.StatusUnprocessableEntity {
		t.Errorf("settled without choosing: status %d", status)
	}
	cy.says("Choose which of the two stands")
	cy.do(chromedp.Click("input[name='choice.sinuosity'][value=proposed]"))
	if status := cy.press("button[value=settle]"); status != http.StatusOK {
		t.Errorf("settling: status %d\n%s", status, cy.text())
	}
	cy.says("accepted as you chose, field by field", "Nothing waits")
	if row := s.csv()[1]; !strings.Contains(row, ",1.8,") || !strings.Contains(row, ",4000,") {
		t.Errorf("after the conflict: %s", row)
	}

	// Restore the first edit: a revision of its own.
	cy.goTo("/systems/tarn-hollow-channel/history?record=measurement:m000001&field=sinuosity")
	cy.says("2 recorded changes of m000001, field Sinuosity")
	cy.press("#history tbody tr:last-child td a")
	cy.says("After that revision", "1.7", "1.8")
	cy.do(chromedp.SetValue("#why", "The first reading was right."), chromedp.SetValue("#restore-field", "sinuosity"))
	cy.press("form.record .actions button")
	cy.says("Restored.", "The first reading was right.")
	if row := s.csv()[1]; !strings.Contains(row, ",1.7,") || !strings.Contains(row, ",4000,") {
		t.Errorf("restored: %s", row)
	}

	// Release and cite.
	cy.goTo("/releases")
	cy.fill(map[string]string{"release-name": "2031.1", "release-title": "Channels of the Tarn Hollow survey"})
	cy.press("form[action^='/releases'] button.primary")
	cy.says("2031.1", "Credit of ann", "Channels of the Tarn Hollow survey")
	reader := s.browse(t)
	reader.goTo("/releases/2031.1")
	reader.says("Cite it", "Credit of ann", "Channels of the Tarn Hollow survey")
	reader.goTo("/systems/tarn-hollow-channel?release=2031.1")
	reader.says("Sinuosity 1.70")
	reader.goTo("/sources?release=2031.1")
	reader.says("Marlow", "10.5555/inv.31")
}
