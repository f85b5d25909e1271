package catalogue

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"regexp"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// SourceUse is a source with what rests on it.
type SourceUse struct {
	Source
	Measurements int
	Systems      int
	Invented     bool // every measurement from it is invented
	// Slopes and Sizes count the measurements whose slope, or width and depth,
	// come from it although their sinuosity comes from another source.
	Slopes, Sizes int
}

// SourceUses lists the sources of the measurements under the filter, by
// citation.
func (s *Store) SourceUses(ctx context.Context, f Filter) ([]SourceUse, error) {
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	q, err := at(ctx, s.r, f.Release)
	if err != nil {
		return nil, fault("sources", err)
	}
	rows, err := q.QueryContext(ctx, "SELECT c.id, c.citation, c.doi, count(*), count(DISTINCT m.system_id), min(substr(m.notes, 1, ?) = ?)"+fromRows+w.String()+
		" GROUP BY c.id ORDER BY c.citation COLLATE NOCASE, c.doi", append([]any{len(InventedMark), InventedMark}, w.args...)...)
	if err != nil {
		return nil, fault("sources", err)
	}
	defer rows.Close()
	var out []SourceUse
	for rows.Next() {
		var u SourceUse
		if err := rows.Scan(&u.ID, &u.Citation, &u.DOI, &u.Measurements, &u.Systems, &u.Invented); err != nil {
			return nil, fault("sources", err)
		}
		out = append(out, u)
	}
	if err := rows.Err(); err != nil {
		return nil, fault("sources", err)
	}
	out, err = valueSources(ctx, q, w, out)
	return out, fault("sources", err)
}

// Reference is a citation taken apart as far as it can be read; Text is always
// the whole of it. Fields that were not found are "".
type Reference struct {
	Text      string
	Authors   []string // family name, given names
	Year      string
	Title     string
	Journal   string
	Volume    string
	Issue     string
	FirstPage string
	LastPage  string
	Publisher string
	DOI       string
}

var (
	// "Family, A. and Other, B. C. (2009) Title. Journal 4:101-128."
	longCitation = regexp.MustCompile(`^(.{2,300}?)\s*\((\d{4})[a-z]?\)[.,:]?\s*(.{8,}?)\.\s+(.+?)\.?$`)
	// "Journal 4:101-128", "Journal, 4(2), 101-128"
	journalPlace = regexp.MustCompile(`^(.+?),?\s+(\d{1,4})(?:\s*\(([^()]{1,12})\))?\s*[:,]\s*([A-Za-z]?\d+)(?:\s*[-\x{2013}]\s*([A-Za-z]?\d+))?$`)
	// "Journal, 40:11 (2012)": as this project cites.
	shortCitation = regexp.MustCompile(`^(.+?),?\s+(\d{1,4})(?:\s*\(([^()]{1,12})\))?:([A-Za-z]?\d+)(?:\s*[-\x{2013}]\s*([A-Za-z]?\d+))?\s*\((\d{4})\)\.?$`)
	anyYear       = regexp.MustCompile(`\((1[6-9]\d\d|20\d\d)[a-z]?\)`)
	authorBreak   = regexp.MustCompile(`\s+(?:and|&)\s+|;\s*|(?:\.,\s+)`)
)

// ReadCitation takes a citation in one of the common orders apart. What does
// not fit any is left whole: its year alone is looked for.
func ReadCitation(citation, doi string) Reference {
	text := strings.Join(strings.Fields(citation), " ")
	r := Reference{Text: text, DOI: doi}
	if m := shortCitation.FindStringSubmatch(text); m != nil {
		r.Journal, r.Volume, r.Issue, r.FirstPage, r.LastPage, r.Year = m[1], m[2], m[3], m[4], m[5], m[6]
		return r
	}
	if m := longCitation.FindStringSubmatch(text); m != nil {
		r.Authors, r.Year, r.Title = splitAuthors(m[1]), m[2], m[3]
		if p := journalPlace.FindStringSubmatch(m[4]); p != nil {
			r.Journal, r.Volume, r.Issue, r.FirstPage, r.LastPage = p[1], p[2], p[3], p[4], p[5]
		} else {
			r.Publisher = m[4]
		}
		return r
	}
	if m := anyYear.FindStringSubmatch(text); m != nil {
		r.Year = m[1]
	}
	return r
}

// splitAuthors reads "Family, A., Other, B. C. and Third, D.". A name without a
// comma is one of an institution.
func splitAuthors(text string) []string {
	var out []string
	for _, part := range authorBreak.Split(strings.TrimSuffix(text, ","), -1) {
		part = strings.Trim(part, " ,")
		if part == "" {
			continue
		}
		// The break took the point of the last initial.
		if n := len(part); n >= 2 && unicode.IsUpper(rune(part[n-1])) && (part[n-2] == ' ' || part[n-2] == '.' || part[n-2] == '-') {
			part += "."
		}
		out = append(out, part)
	}
	return out
}

// CiteKey names a source in a bibliography: its number keeps it unique and
// stable.
func CiteKey(s Source) string {
	r := ReadCitation(s.Citation, s.DOI)
	name := "source"
	if len(r.Authors) > 0 {
		family, _, _ := strings.Cut(r.Authors[0], ",")
		if plain := strings.ReplaceAll(Slug(family), "-", ""); plain != "" {
			name = plain[:min(len(plain), 30)]
		}
	}
	if s.ID == 0 { // of a single value: it has no number
		sum := sha256.Sum256([]byte(s.Citation + "\n" + s.DOI))
		return name + r.Year + "-v" + hex.EncodeToString(sum[:4])
	}
	return name + r.Year + "-" + strconv.FormatInt(s.ID, 10)
}

// texEscapes are the characters TeX reads as commands.
var texEscapes = strings.NewReplacer(`\`, `{\textbackslash}`, `{`, `\{`, `}`, `\}`, `#`, `\#`, `$`, `\$`, `%`, `\%`, `&`, `\&`, `_`, `\_`, `~`, `{\textasciitilde}`, `^`, `{\textasciicircum}`)

// BibTeX is a source as an entry of a BibTeX file, in UTF-8.
func BibTeX(s SourceUse) string {
	r := ReadCitation(s.Citation, s.DOI)
	kind := "misc"
	if r.Journal != "" {
		kind = "article"
	}
	var b strings.Builder
	b.WriteString("@" + kind + "{" + CiteKey(s.Source))
	field := func(name, value string) {
		if value = strings.Join(strings.Fields(value), " "); value != "" {
			b.WriteString(",\n  " + name + " = {" + value + "}")
		}
	}
	var authors []string
	for _, a := range r.Authors {
		a = texEscapes.Replace(a)
		if !strings.Contains(a, ",") {
			a = "{" + a + "}" // an institution stays in one piece
		}
		authors = append(authors, a)
	}
	field("author", strings.Join(authors, " and "))
	title := texEscapes.Replace(r.Title)
	if title != "" {
		title = "{" + title + "}" // capitals stay as they are
	}
	field("title", title)
	field("journal", texEscapes.Replace(r.Journal))
	field("volume", r.Volume)
	field("number", texEscapes.Replace(r.Issue))
	pages := r.FirstPage
	if r.LastPage != "" {
		pages += "--" + r.LastPage
	}
	field("pages", pages)
	field("howpublished", texEscapes.Replace(r.Publisher))
	field("year", r.Year)
	field("doi", strings.NewReplacer("{", "", "}", "").Replace(r.DOI)) // verbatim: a DOI is no TeX
	note := texEscapes.Replace(r.Text)
	if s.Invented {
		note = InventedMark + " " + note
	}
	field("note", note)
	b.WriteString("\n}\n")
	return b.String()
}

// RIS is a source as an entry of an RIS file: tag, two blanks, dash, blank.
func RIS(s SourceUse) string {
	r := ReadCitation(s.Citation, s.DOI)
	var b strings.Builder
	tag := func(name, value string) {
		if value = strings.Join(strings.Fields(value), " "); value != "" {
			b.WriteString(name + "  - " + value + "\r\n")
		}
	}
	kind := "GEN"
	if r.Journal != "" {
		kind = "JOUR"
	}
	tag("TY", kind)
	tag("ID", CiteKey(s.Source))
	for _, a := range r.Authors {
		tag("AU", a)
	}
	title := r.Title
	if title == "" {
		title = r.Text
	}
	tag("TI", title)
	tag("T2", r.Journal)
	tag("VL", r.Volume)
	tag("IS", r.Issue)
	tag("SP", r.FirstPage)
	tag("EP", r.LastPage)
	tag("PB", r.Publisher)
	tag("PY", r.Year)
	tag("DO", r.DOI)
	tag("N1", r.Text)
	if s.Invented {
		tag("N1", InventedMark)
	}
	b.WriteString("ER  - \r\n\r\n")
	return b.String()
}

// Citation writes a reference the way longCitation reads it.
func (r Reference) Citation() string {
	var b strings.Builder
	for i, a := range r.Authors {
		switch {
		case i > 0 && i == len(r.Authors)-1:
			b.WriteString(" and ")
		case i > 0:
			b.WriteString(", ")
		}
		b.WriteString(a)
	}
	sentence := func(text, before string) {
		if text != "" {
			if b.Len() > 0 {
				b.WriteString(before)
			}
			b.WriteString(text)
		}
	}
	if r.Year != "" {
		sentence("("+r.Year+")", " ")
	}
	sentence(strings.TrimSuffix(r.Title, "."), " ")
	place := r.Journal
	if place != "" && r.Volume != "" {
		place += " " + r.Volume
		if r.Issue != "" {
			place += "(" + r.Issue + ")"
		}
	}
	if place != "" && r.FirstPage != "" {
		mark := ":"
		if r.Volume == "" {
			mark = " "
		}
		place += mark + r.FirstPage
		if r.LastPage != "" {
			place += "-" + r.LastPage
		}
	}
	if place == "" {
		place = r.Publisher
	}
	sentence(place, ". ")
	if text := strings.TrimSpace(b.String()); text != "" {
		return strings.TrimSuffix(text, ".") + "."
	}
	return ""
}

// clipReference bounds what a pasted entry may fill in.
func clipReference(s string) string {
	s = strings.Join(strings.Fields(s), " ")
	if utf8.RuneCountInString(s) > 2000 {
		return string([]rune(s)[:2000])
	}
	return s
}
