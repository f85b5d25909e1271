package views

import (
	"net/url"
	"time"
)

// SettingsPage is the keeper's page of what is chosen for the catalogue.
type SettingsPage struct {
	Page
	Typed       url.Values        // by name, as typed or as in force
	Default     url.Values        // what the program would do
	Own         map[string]bool   // settings that are not the default
	Errors      map[string]string // by name; file, why and import_why too
	Clusterings []string
	Changes     []SettingChange
}

// SettingChange is one change that was made.
type SettingChange struct {
	At                            time.Time
	Who, Why, Name, Before, After string
}

// settingWord explains one setting.
type settingWord struct{ label, source, effect string }

var settingWords = map[string]settingWord{
	"title": {"Title of the catalogue", "Default: that of the latest release, before the first one Fathombend catalogue of submarine channels.",
		"Stands in citations, data packages, the feed and the features of the catalogue as it is, and is offered for the next release. Releases keep the title they were frozen with."},
	"licence": {"Licence of the collection", "Default: the widest that the rows allow, CC0 when every row is CC0, else CC BY 4.0.",
		"Is offered for the next release. Each row keeps the licence it was contributed under; freezing a release under CC0 is refused as long as one row is not."},
	"class_limits": {"Class limits of sinuosity", "Default 1.05, 1.2, 1.5: a convention of this program. No published limit for submarine channels is settled; in rivers 1.5 is used for meandering (Leopold and Wolman, US Geol. Surv. Prof. Pap. 282-B (1957)).",
		"Parts the classes of the expectation with their base rates; from the second on a channel counts as sinuous in the facies statements. Fits do not change."},
	"climate_table": {"Climate state by age", "Default: the built-in table, each boundary with its source and marked where it is from memory.",
		"The climate explanation of the expectation, the deep-time test and the category climate_state of a joint regression look ages up in it. An age on a boundary belongs to the older interval."},
	"cluster": {"Cluster of the regression", "Default: parent_deposit, else the system. Systems of one deposit are not independent.",
		"The opening page and the page Regression ask with it when the address names none, and then say so in the address. Data addresses and the command line keep parent_deposit unless told."},
	"registration": {"Registration", "Default: closed, people come by invitation.",
		"Open: anyone can make an account, sign in and keep drafts. Nothing is sent until a curator or a keeper lets the person in."},
}

func clusterChoice(c string) string {
	switch c {
	case "parent_deposit":
		return "parent deposit, else the system"
	case "none":
		return "none: every row for itself"
	}
	return c
}

// Fact is a name and its value.
type Fact struct{ Name, Value string }

// SettingFact names a setting with its value in words.
func SettingFact(name, value string) Fact { return Fact{settingLabel(name), value} }
