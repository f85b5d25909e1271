package static

import (
	"io/fs"
	"regexp"
	"strings"
	"testing"
)

var (
	faceRule   = regexp.MustCompile(`(?s)@font-face \{(.*?)\}`)
	descriptor = regexp.MustCompile(`(?m)^\s*([a-z-]+):\s*(.*?);$`)
	fontFile   = regexp.MustCompile(`url\("([^"]+)"\)`)
)

// Every face of a family, style and weight has one part with the letter A.
// Browsers join parts only where these three descriptors are equal (CSS Fonts
// 4, section 5.2), so that a part for accents over a wider range of weights
// takes the place of the plain one, and a page of plain text falls back.
func TestEveryFaceHasPlainLetters(t *testing.T) {
	css, err := fs.ReadFile(Files, "fonts.css")
	if err != nil {
		t.Fatal(err)
	}
	plain, files := map[string]int{}, map[string]bool{}
	for _, rule := range faceRule.FindAllStringSubmatch(string(css), -1) {
		d := map[string]string{}
		for _, m := range descriptor.FindAllStringSubmatch(rule[1], -1) {
			d[m[1]] = m[2]
		}
		m := fontFile.FindStringSubmatch(d["src"])
		if m == nil {
			continue // a local fallback
		}
		files[m[1]] = true
		key := strings.Join([]string{d["font-family"], d["font-style"], d["font-weight"]}, " ")
		plain[key] += 0
		if strings.HasPrefix(d["unicode-range"], "U+0000-00FF") {
			plain[key]++
		}
	}
	if len(plain) != 5 {
		t.Errorf("%d faces, want 5: %v", len(plain), plain)
	}
	for face, n := range plain {
		if n != 1 {
			t.Errorf("%s: %d parts with plain letters, want 1", face, n)
		}
	}
	stored, err := fs.Glob(Files, "fonts/*.woff2")
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range stored {
		if !files[name] {
			t.Errorf("%s is in no rule", name)
		}
		delete(files, name)
	}
	for name := range files {
		t.Errorf("%s is not there", name)
	}
}
