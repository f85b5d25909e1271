package main

import (
	"archive/zip"
	"bytes"
	"crypto/sha256"
	"encoding/csv"
	"encoding/hex"
	"encoding/json"
	"encoding/xml"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"gopkg.in/yaml.v3"
)

// releasedSite holds the demo's rows as release 2026.1.
func releasedSite(t testing.TB) *site {
	table := mustRun(t, "", "export")
	return newSite(t, func(file string) {
		mustRun(t, table, "import", "-catalogue", file, "-publish", "-")
		mustRun(t, "", "release", "-catalogue", file, "2026.1", "-notes", "First")
	})
}

// unpacked is the content of a zip by name.
func unpacked(t testing.TB, body string) map[string]string {
	t.Helper()
	z, err := zip.NewReader(strings.NewReader(body), int64(len(body)))
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]string{}
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		b, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		out[f.Name] = string(b)
	}
	return out
}

// obeys checks a value against a published schema; testdata/schemas/README.md
// says where each is from.
func obeys(t testing.TB, schema string, v any) {
	t.Helper()
	b, err := os.ReadFile(filepath.Join("testdata", "schemas", schema))
	if err != nil {
		t.Fatal(err)
	}
	text, err := jsonschema.UnmarshalJSON(bytes.NewReader(b))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("file:///"+schema, text); err != nil {
		t.Fatal(err)
	}
	s, err := c.Compile("file:///" + schema)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Validate(v); err != nil {
		t.Errorf("%s: %v", schema, err)
	}
}

func jsonValue(t testing.TB, text string) map[string]any {
	t.Helper()
	v, err := jsonschema.UnmarshalJSON(strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	return v.(map[string]any)
}

func TestDataPackage(t *testing.T) {
	files := unpacked(t, releasedSite(t).visitor().get("/releases/2026.1.zip").is(200).body)
	sums := 0
	for line := range strings.Lines(files["SHA256SUMS"]) {
		sum, name, _ := strings.Cut(strings.TrimSpace(line), "  ")
		have := sha256.Sum256([]byte(files[name]))
		if hex.EncodeToString(have[:]) != sum {
			t.Errorf("%s: its checksum does not hold", name)
		}
		sums++
	}
	if sums != len(files)-1 {
		t.Errorf("%d checksums for %d files", sums, len(files))
	}
	frictionless(t, files)
	onTheWeb(t, files)
	var cff map[string]any
	if err := yaml.Unmarshal([]byte(files["CITATION.cff"]), &cff); err != nil {
		t.Fatal(err)
	}
	if day, ok := cff["date-released"].(time.Time); ok { // YAML reads a day as a time
		cff["date-released"] = day.Format("2006-01-02")
	}
	b, err := json.Marshal(cff)
	if err != nil {
		t.Fatal(err)
	}
	obeys(t, "citation-file-format-1.2.0.json", jsonValue(t, string(b)))
}

// frictionless checks datapackage.json and that the tables have its columns.
func frictionless(t *testing.T, files map[string]string) {
	descriptor := jsonValue(t, files["datapackage.json"])
	obeys(t, "data-package.json", descriptor)
	tables := 0
	for _, r := range descriptor["resources"].([]any) {
		r := r.(map[string]any)
		body, name := files[r["path"].(string)], r["name"].(string)
		if sum := sha256.Sum256([]byte(body)); r["hash"] != "sha256:"+hex.EncodeToString(sum[:]) {
			t.Errorf("%s: its hash does not hold", name)
		}
		if r["profile"] != "tabular-data-resource" {
			continue
		}
		tables++
		obeys(t, "tabular-data-resource.json", r)
		obeys(t, "table-schema.json", r["schema"])
		var fields []string
		for _, f := range r["schema"].(map[string]any)["fields"].([]any) {
			fields = append(fields, f.(map[string]any)["name"].(string))
		}
		if head := header(t, body); !slices.Equal(head, fields) {
			t.Errorf("%s: columns %v, described %v", name, head, fields)
		}
	}
	if tables != 4 {
		t.Errorf("%d tables described, want 4", tables)
	}
}

func header(t testing.TB, table string) []string {
	t.Helper()
	head, err := csv.NewReader(strings.NewReader(table)).Read()
	if err != nil {
		t.Fatal(err)
	}
	return head
}

// onTheWeb checks csv-metadata.json by the rules of the Metadata Vocabulary for
// Tabular Data (W3C, 2015) that bear on it: 5.2 context, 5.3 table groups, 5.4
// tables, 5.5 schemas and their keys, 5.6 columns, 5.11 datatypes.
func onTheWeb(t *testing.T, files map[string]string) {
	m := jsonValue(t, files["csv-metadata.json"])
	if context := m["@context"].([]any); context[0] != "http://www.w3.org/ns/csvw" {
		t.Errorf("context %v", context)
	}
	columns := map[string][]string{} // by table
	for _, table := range m["tables"].([]any) {
		table := table.(map[string]any)
		url := table["url"].(string)
		schema := table["tableSchema"].(map[string]any)
		for _, c := range schema["columns"].([]any) {
			c := c.(map[string]any)
			columns[url] = append(columns[url], c["titles"].(string))
			base := c["datatype"]
			if of, ok := base.(map[string]any); ok {
				base = of["base"]
			}
			if !slices.Contains([]any{"string", "double", "integer"}, base) {
				t.Errorf("%s, %v: datatype %v", url, c["name"], base)
			}
			if strings.HasPrefix(c["name"].(string), "_") {
				t.Errorf("%s: a name that begins with _ is kept for the standard", url)
			}
		}
		if head := header(t, files[url]); !slices.Equal(head, columns[url]) {
			t.Errorf("%s: columns %v, described %v", url, head, columns[url])
		}
		if key, ok := schema["primaryKey"].(string); !ok || !slices.Contains(columns[url], key) {
			t.Errorf("%s: primary key %v", url, schema["primaryKey"])
		}
	}
	for _, table := range m["tables"].([]any) {
		schema := table.(map[string]any)["tableSchema"].(map[string]any)
		keys, _ := schema["foreignKeys"].([]any)
		for _, k := range keys {
			to := k.(map[string]any)["reference"].(map[string]any)
			if !slices.Contains(columns[to["resource"].(string)], to["columnReference"].(string)) {
				t.Errorf("a foreign key to %v", to)
			}
		}
	}
}

// TestFeedRules checks the feed by RFC 4287: 4.1.1 and 4.1.2 say what a feed and
// an entry must hold, 3.3 how times are written, 4.2.7.2 which links.
func TestFeedRules(t *testing.T) {
	a := releasedSite(t).visitor().get("/feed.atom").is(200)
	if kind := a.header.Get("Content-Type"); !strings.HasPrefix(kind, "application/atom+xml") {
		t.Errorf("Content-Type %q", kind)
	}
	type link struct {
		Rel  string `xml:"rel,attr"`
		Href string `xml:"href,attr"`
	}
	var feed struct {
		XMLName xml.Name `xml:"http://www.w3.org/2005/Atom feed"`
		ID      []string `xml:"id"`
		Title   []string `xml:"title"`
		Updated []string `xml:"updated"`
		Authors []string `xml:"author>name"`
		Links   []link   `xml:"link"`
		Entries []struct {
			ID      []string `xml:"id"`
			Title   []string `xml:"title"`
			Updated []string `xml:"updated"`
			Links   []link   `xml:"link"`
			Content []string `xml:"content"`
			Summary []string `xml:"summary"`
		} `xml:"entry"`
	}
	if err := xml.Unmarshal([]byte(a.body), &feed); err != nil {
		t.Fatal(err)
	}
	one := func(what string, values []string) string {
		if len(values) != 1 || strings.TrimSpace(values[0]) == "" {
			t.Errorf("%s: %q, want exactly one", what, values)
			return ""
		}
		return values[0]
	}
	at := func(what string, values []string) time.Time {
		when, err := time.Parse(time.RFC3339, one(what, values))
		if err != nil {
			t.Errorf("%s: %v", what, err)
		}
		return when
	}
	one("feed id", feed.ID)
	one("feed title", feed.Title)
	newest := at("feed updated", feed.Updated)
	if len(feed.Authors) == 0 {
		t.Error("neither the feed nor its entries have an author")
	}
	if !slices.ContainsFunc(feed.Links, func(l link) bool { return l.Rel == "self" && strings.HasPrefix(l.Href, "http") }) {
		t.Errorf("no link to itself: %v", feed.Links)
	}
	ids := map[string]bool{}
	for _, e := range feed.Entries {
		id := one("entry id", e.ID)
		if ids[id] {
			t.Errorf("two entries are %s", id)
		}
		ids[id] = true
		one("entry title", e.Title)
		if at("entry updated", e.Updated).After(newest) {
			t.Errorf("%s is newer than the feed", id)
		}
		if !slices.ContainsFunc(e.Links, func(l link) bool { return l.Rel == "alternate" || l.Rel == "" }) && len(e.Content) == 0 {
			t.Errorf("%s has neither content nor an alternate link", id)
		}
	}
	if len(feed.Entries) < 2 {
		t.Errorf("%d entries, want the release and systems", len(feed.Entries))
	}
}
