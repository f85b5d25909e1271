package catalogue

import (
	"context"
	"strconv"
	"strings"
	"unicode"

	"golang.org/x/text/unicode/norm"
)

const maxSlug = 80

// reservedSlugs are addresses below /systems that are not systems.
var reservedSlugs = map[string]bool{"dimensions": true}

// letters that do not decompose into a plain one and a mark.
var plainLetters = strings.NewReplacer("ß", "ss", "æ", "ae", "ø", "o", "œ", "oe", "đ", "d", "ð", "d", "ł", "l", "þ", "th", "ı", "i")

// Slug makes the short name of a system from its name: small plain letters,
// digits and single dashes.
func Slug(name string) string {
	var b strings.Builder
	dash := false
	for _, r := range norm.NFKD.String(plainLetters.Replace(strings.ToLower(name))) {
		r = unicode.ToLower(r)
		switch {
		case r < 128 && (unicode.IsLetter(r) || unicode.IsDigit(r)):
			if dash && b.Len() > 0 {
				b.WriteByte('-')
			}
			dash = false
			b.WriteRune(r)
		case unicode.IsMark(r), r == '\'', r == '\u2019':
		default:
			dash = true
		}
		if b.Len() >= maxSlug-10 {
			break
		}
	}
	if b.Len() == 0 {
		return "system"
	}
	s := b.String()
	return strings.Trim(s[:min(len(s), maxSlug-10)], "-") // room for a number
}

// freeSlug returns the slug of name, numbered when it is taken. Slugs are given
// once and stay when the name changes.
func freeSlug(ctx context.Context, q querier, name string) (string, error) {
	base := Slug(name)
	for n := 1; ; n++ {
		slug := base
		if n > 1 {
			slug += "-" + strconv.Itoa(n)
		}
		var taken bool
		if err := q.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM systems WHERE slug = ?)`, slug).Scan(&taken); err != nil {
			return "", err
		}
		if !taken && !reservedSlugs[slug] {
			return slug, nil
		}
	}
}
