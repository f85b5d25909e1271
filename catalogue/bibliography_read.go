package catalogue

import (
	"strings"
	"unicode/utf8"

	"golang.org/x/text/unicode/norm"
)

// ReadReference reads the first entry of a pasted BibTeX or RIS text. Anything
// else is Invalid, with what was expected.
func ReadReference(text string) (Reference, error) {
	const expected = "one BibTeX entry, beginning with @article{ or the like, or one RIS entry, beginning with TY  -"
	text = CleanText(text)
	var fields []bibField
	switch {
	case len(text) > 64<<10 || !utf8.ValidString(text):
		return Reference{}, &Error{Code: Invalid, Field: "reference", Message: "the text is too long or not UTF-8", Expected: expected}
	case strings.HasPrefix(text, "TY  -") || strings.HasPrefix(text, "TY -"):
		fields = readRIS(text)
	case strings.Contains(text, "@"):
		fields = readBibTeX(text)
	}
	r := referenceOf(fields)
	if r.Title == "" && r.Journal == "" && len(r.Authors) == 0 {
		return Reference{}, &Error{Code: Invalid, Field: "reference", Message: "no entry could be read in it", Expected: expected}
	}
	r.Text = r.Citation()
	return r, nil
}

// bibField is one field under the name RIS or BibTeX gives it, small letters.
type bibField struct{ name, value string }

func referenceOf(fields []bibField) (r Reference) {
	first := func(into *string, v string) {
		if *into == "" {
			*into = clipReference(v)
		}
	}
	for _, f := range fields {
		v := strings.TrimSpace(f.value)
		switch f.name {
		case "au", "a1":
			if v != "" && len(r.Authors) < 200 {
				r.Authors = append(r.Authors, clipReference(v))
			}
		case "title", "ti", "t1":
			first(&r.Title, v)
		case "journal", "journaltitle", "booktitle", "t2", "jo", "jf", "ja":
			first(&r.Journal, v)
		case "volume", "vl":
			first(&r.Volume, v)
		case "number", "issue", "is":
			first(&r.Issue, v)
		case "pages":
			from, to, _ := strings.Cut(strings.NewReplacer("\u2013", "-", "--", "-").Replace(v), "-")
			first(&r.FirstPage, from)
			first(&r.LastPage, strings.Trim(to, "- "))
		case "sp":
			first(&r.FirstPage, v)
		case "ep":
			first(&r.LastPage, v)
		case "year", "date", "py", "y1", "da":
			if len(v) >= 4 && strings.Trim(v[:4], "0123456789") == "" {
				first(&r.Year, v[:4])
			}
		case "publisher", "institution", "school", "howpublished", "pb":
			first(&r.Publisher, v)
		case "doi", "do":
			if doi, err := releaseDOI(v); err == nil {
				first(&r.DOI, doi)
			}
		}
	}
	return r
}

// familyFirst turns "Ann B. Author" into "Author, Ann B."; names with a comma
// stand so already.
func familyFirst(name string) string {
	if strings.Contains(name, ",") || !strings.Contains(name, " ") {
		return name
	}
	i := strings.LastIndex(name, " ")
	return name[i+1:] + ", " + name[:i]
}

// readRIS reads lines "XX  - value" up to the end of the first entry.
func readRIS(text string) []bibField {
	var out []bibField
	for _, line := range strings.Split(text, "\n") {
		name, value, ok := strings.Cut(line, "-")
		name = strings.TrimSpace(name)
		if ok && len(name) == 2 {
			if name == "ER" {
				break
			}
			out = append(out, bibField{strings.ToLower(name), strings.TrimSpace(value)})
		} else if len(out) > 0 { // a value that goes on
			out[len(out)-1].value += " " + strings.TrimSpace(line)
		}
	}
	return out
}

// readBibTeX reads the fields of the first entry: name = {value}, "value" or a
// bare word, braces nested.
func readBibTeX(text string) []bibField {
	_, rest, ok := strings.Cut(text, "@")
	if !ok {
		return nil
	}
	open := strings.IndexAny(rest, "{(")
	comma := strings.IndexByte(rest, ',')
	if open < 0 || comma < open {
		return nil
	}
	rest = rest[comma+1:]
	var out []bibField
	for {
		rest = strings.TrimLeft(rest, " \t\r\n,")
		equals := strings.IndexByte(rest, '=')
		if equals < 0 || rest[0] == '}' || rest[0] == ')' || strings.ContainsAny(rest[:equals], "}@{") {
			return out
		}
		name := strings.ToLower(strings.TrimSpace(rest[:equals]))
		var value string
		value, rest = bibValue(strings.TrimLeft(rest[equals+1:], " \t\r\n"))
		if name == "author" {
			out = append(out, bibAuthors(value)...)
			continue
		}
		out = append(out, bibField{name, plainTeX(value)})
	}
}

// bibAuthors splits at the word "and" outside of braces. A name wholly in braces
// is one of an institution and stays as it is.
func bibAuthors(value string) []bibField {
	var out []bibField
	depth, start := 0, 0
	value = strings.Join(strings.Fields(value), " ") + " and "
	for i := range len(value) {
		switch value[i] {
		case '{':
			depth++
		case '}':
			depth--
		}
		if depth > 0 || !strings.HasPrefix(value[i:], " and ") || i < start {
			continue
		}
		name := strings.TrimSpace(value[start:i])
		start = i + len(" and ")
		plain := strings.TrimSpace(plainTeX(name))
		if plain == "" || plain == "others" {
			continue
		}
		if !strings.HasPrefix(name, "{") || !strings.HasSuffix(name, "}") {
			plain = familyFirst(plain)
		}
		out = append(out, bibField{"au", plain})
	}
	return out
}

// bibValue takes one value off the front.
func bibValue(s string) (value, rest string) {
	if s == "" {
		return "", ""
	}
	if s[0] != '{' && s[0] != '"' {
		end := strings.IndexAny(s, ",}\n")
		if end < 0 {
			end = len(s)
		}
		return strings.TrimSpace(s[:end]), s[end:]
	}
	depth := 0
	for i := 0; i < len(s); i++ {
		switch s[i] {
		case '\\':
			i++
		case '{':
			depth++
		case '}':
			depth--
			if depth == 0 && s[0] == '{' {
				return s[1:i], s[i+1:]
			}
		case '"':
			if s[0] == '"' && i > 0 && depth == 0 {
				return s[1:i], s[i+1:]
			}
		}
	}
	return strings.TrimLeft(s, `{"`), ""
}

// texAccents are the combining characters of TeX's accent commands.
var texAccents = map[byte]string{'\'': "\u0301", '`': "\u0300", '^': "\u0302", '"': "\u0308", '~': "\u0303", '=': "\u0304", '.': "\u0307", 'c': "\u0327", 'v': "\u030c", 'u': "\u0306", 'H': "\u030b", 'k': "\u0328", 'r': "\u030a"}

// texLetters are letters with a command of their own.
var texLetters = map[string]string{"ss": "ß", "o": "ø", "O": "Ø", "l": "ł", "L": "Ł", "ae": "æ", "AE": "Æ", "oe": "œ", "OE": "Œ", "aa": "å", "AA": "Å", "i": "i", "j": "j",
	"textbackslash": `\`, "textasciitilde": "~", "textasciicircum": "^", "&": "&", "%": "%", "$": "$", "#": "#", "_": "_", "{": "{", "}": "}", " ": " "}

// plainTeX takes braces and the commands of accents and letters off a value.
func plainTeX(s string) string {
	if !strings.ContainsAny(s, `\{}~`) {
		return s
	}
	var b strings.Builder
	for i := 0; i < len(s); {
		switch {
		case s[i] == '{' || s[i] == '}':
			i++
		case s[i] == '~':
			b.WriteByte(' ')
			i++
		case s[i] != '\\' || i+1 == len(s):
			b.WriteByte(s[i])
			i++
		default:
			var text string
			text, i = texCommand(s, i+1)
			b.WriteString(text)
		}
	}
	return norm.NFC.String(b.String())
}

// texCommand reads the command at s[i] (after the backslash) with its letter.
func texCommand(s string, i int) (text string, next int) {
	end := i
	for end < len(s) && (s[end] >= 'a' && s[end] <= 'z' || s[end] >= 'A' && s[end] <= 'Z') {
		end++
	}
	if end == i {
		end++ // a command of one sign
	}
	name := s[i:end]
	if mark, ok := texAccents[name[0]]; ok && len(name) == 1 {
		for end < len(s) && (s[end] == '{' || s[end] == ' ' || s[end] == '\\') {
			end++
		}
		r, size := utf8.DecodeRuneInString(s[end:])
		if size == 0 || r == utf8.RuneError {
			return "", end
		}
		return string(r) + mark, end + size
	}
	for end < len(s) && s[end] == ' ' && name[0] >= 'A' {
		end++ // blanks end a command of letters
	}
	return texLetters[name], end
}
