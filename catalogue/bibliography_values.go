package catalogue

import (
	"cmp"
	"context"
	"regexp"
	"slices"
	"strings"
)

// endingDOI is a DOI at the end of a citation, with or without its resolver.
var endingDOI = regexp.MustCompile(`(?i)[\s,;.]*\(?(?:https?://(?:dx\.)?doi\.org/|doi[:\s]\s*|\s)(10\.[0-9]{4,9}(?:\.[0-9]+)*/[^\s()]+?)[).]*$`)

// ValueSource reads the cell slope_source or size_source: a citation, with its
// DOI at the end where it has one, as "Journal 4:101 (2009), doi 10.1/x".
func ValueSource(cell string) Source {
	cell = CleanText(cell)
	if m := endingDOI.FindStringSubmatchIndex(" " + cell); m != nil {
		doi := (" " + cell)[m[2]:m[3]]
		if rest := strings.TrimSpace((" " + cell)[:m[0]]); rest != "" {
			return Source{Citation: rest, DOI: doi}
		}
		return Source{Citation: "doi " + doi, DOI: doi}
	}
	return Source{Citation: cell}
}

// sameSource says whether two sources are one: by their DOI where both have
// one, else by their words.
func sameSource(a, b Source) bool {
	if a.DOI != "" && b.DOI != "" {
		return strings.EqualFold(a.DOI, b.DOI)
	}
	return strings.EqualFold(strings.TrimRight(a.Citation, ". "), strings.TrimRight(b.Citation, ". "))
}

// valueSources adds to the list of sources what single values rest on: counted
// with the source it is, or as one of its own.
func valueSources(ctx context.Context, q querier, w *where, uses []SourceUse) ([]SourceUse, error) {
	for _, column := range []string{"slope_source", "size_source"} {
		more := where{parts: slices.Clone(w.parts), args: slices.Clone(w.args)}
		more.add("m." + column + " <> ''")
		rows, err := q.QueryContext(ctx, "SELECT m."+column+", count(*), min(substr(m.notes, 1, ?) = ?)"+fromRows+more.String()+" GROUP BY m."+column,
			append([]any{len(InventedMark), InventedMark}, more.args...)...)
		if err != nil {
			return nil, err
		}
		defer rows.Close()
		for rows.Next() {
			var cell string
			var n int
			var invented bool
			if err := rows.Scan(&cell, &n, &invented); err != nil {
				return nil, err
			}
			s := ValueSource(cell)
			i := slices.IndexFunc(uses, func(u SourceUse) bool { return sameSource(u.Source, s) })
			if i < 0 {
				uses, i = append(uses, SourceUse{Source: s, Invented: invented}), len(uses)
			}
			uses[i].Invented = uses[i].Invented && invented
			if column == "slope_source" {
				uses[i].Slopes += n
			} else {
				uses[i].Sizes += n
			}
		}
		if err := rows.Err(); err != nil {
			return nil, err
		}
	}
	slices.SortStableFunc(uses, func(a, b SourceUse) int {
		return cmp.Or(cmp.Compare(strings.ToLower(a.Citation), strings.ToLower(b.Citation)), cmp.Compare(a.DOI, b.DOI))
	})
	return uses, nil
}
