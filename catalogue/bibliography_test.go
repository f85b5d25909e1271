package catalogue

import (
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/google/go-cmp/cmp"
)

// Citations in the orders in use; the papers are invented.
func TestReadCitation(t *testing.T) {
	for in, want := range map[string]Reference{
		"Quathrell, I. and Torvessane, A. (2009) Twelve leveed channels mapped by multibeam echo sounder. Invented Transactions on the Deep Sea Floor 4:101-128.": {
			Authors: []string{"Quathrell, I.", "Torvessane, A."}, Year: "2009", Title: "Twelve leveed channels mapped by multibeam echo sounder",
			Journal: "Invented Transactions on the Deep Sea Floor", Volume: "4", FirstPage: "101", LastPage: "128"},
		"Haruzekki, T., Dravenholt, L. and Osk, P. (2004) Channel courses. Imaginary Letters, 12(3), 7–19.": {
			Authors: []string{"Haruzekki, T.", "Dravenholt, L.", "Osk, P."}, Year: "2004", Title: "Channel courses", Journal: "Imaginary Letters", Volume: "12", Issue: "3", FirstPage: "7", LastPage: "19"},
		"Imaginary Geology 40:11 (2012)": {Journal: "Imaginary Geology", Volume: "40", FirstPage: "11", Year: "2012"},
		"Demonstration survey (2024) Centrelines drawn for this catalogue. Invented data set.": {
			Authors: []string{"Demonstration survey"}, Year: "2024", Title: "Centrelines drawn for this catalogue", Publisher: "Invented data set"},
		"a cruise report of the vessel Nobody (1987), p. 4": {Year: "1987"},
		"unpublished": {},
	} {
		want.Text = in
		if diff := cmp.Diff(want, ReadCitation(in, "")); diff != "" {
			t.Errorf("%s:\n%s", in, diff)
		}
	}
}

func TestBibTeXAndRIS(t *testing.T) {
	u := SourceUse{Source: Source{ID: 7, Citation: "Ökland, I. and Torvessane & Sons (2009) 50% of {channels} in $ & #1_2. Invented Transactions 4:101-128.", DOI: "10.5555/x_(1)%2"}, Invented: true}
	wantBib := `@article{okland2009-7,
  author = {Ökland, I. and {Torvessane} and {Sons}},
  title = {{50\% of \{channels\} in \$ \& \#1\_2}},
  journal = {Invented Transactions},
  volume = {4},
  pages = {101--128},
  year = {2009},
  doi = {10.5555/x_(1)%2},
  note = {Invented for the demo. Ökland, I. and Torvessane \& Sons (2009) 50\% of \{channels\} in \$ \& \#1\_2. Invented Transactions 4:101-128.}
}
`
	if diff := cmp.Diff(wantBib, BibTeX(u)); diff != "" {
		t.Error(diff)
	}
	wantRIS := "TY  - JOUR\r\nID  - okland2009-7\r\nAU  - Ökland, I.\r\nAU  - Torvessane\r\nAU  - Sons\r\nTI  - 50% of {channels} in $ & #1_2\r\nT2  - Invented Transactions\r\nVL  - 4\r\nSP  - 101\r\nEP  - 128\r\nPY  - 2009\r\nDO  - 10.5555/x_(1)%2\r\n" +
		"N1  - Ökland, I. and Torvessane & Sons (2009) 50% of {channels} in $ & #1_2. Invented Transactions 4:101-128.\r\nN1  - Invented for the demo.\r\nER  - \r\n\r\n"
	if diff := cmp.Diff(wantRIS, RIS(u)); diff != "" {
		t.Error(diff)
	}
	odd := SourceUse{Source: Source{ID: 1, Citation: "line\r\nTY  - HIJACK\nER  - \n@misc{x}"}}
	if got := RIS(odd); strings.Count(got, "\r\n") != strings.Count(got, "  - ")-2+1+1 && strings.Contains(got, "\r\nER  - \r\n@") {
		t.Errorf("a citation of several lines: %q", got)
	}
	if got := BibTeX(odd); !strings.Contains(got, `@misc\{x\}`) || strings.Count(got, "\n@") != 0 {
		t.Errorf("a citation with an entry in it: %q", got)
	}
}

// A pasted entry fills the source in; written out and read again it is the
// same.
func TestReadReference(t *testing.T) {
	want := Reference{Authors: []string{"Müller, Ann B.", "Łącki, C.", "Deep Sea Institute"}, Year: "2019", Title: "Why channels bend: 50 % of it", Journal: "Imaginary Letters",
		Volume: "12", Issue: "3", FirstPage: "7", LastPage: "19", DOI: "10.5555/abc.1"}
	want.Text = "Müller, Ann B., Łącki, C. and Deep Sea Institute (2019) Why channels bend: 50 % of it. Imaginary Letters 12(3):7-19."
	for name, text := range map[string]string{
		"BibTeX": `% a comment
@Article{mueller:19,
  author = "Ann B. M{\"u}ller and {\L}{\k a}cki, C. and {Deep Sea Institute}",
  title  = {{Why channels bend}: 50~\% of it},
  journal = {Imaginary Letters}, volume = 12, number = {3},
  pages = {7--19}, year = 2019, month = mar,
  doi = {https://doi.org/10.5555/abc.1}
}
@misc{next, title = {Not this one}}`,
		"RIS": "TY  - JOUR\r\nAU  - Müller, Ann B.\r\nAU  - Łącki, C.\r\nA1  - Deep Sea Institute\r\nTI  - Why channels bend:\r\n 50 % of it\r\nJO  - Imaginary Letters\r\nVL  - 12\r\nIS  - 3\r\nSP  - 7\r\nEP  - 19\r\nPY  - 2019/03/01\r\nDO  - 10.5555/abc.1\r\nER  - \r\nTY  - BOOK\r\nTI  - Not this one\r\n",
	} {
		got, err := ReadReference(text)
		if diff := cmp.Diff(want, got); diff != "" || err != nil {
			t.Errorf("%s: %v\n%s", name, err, diff)
		}
	}
	again := ReadCitation(want.Text, want.DOI)
	want.Authors[0] = "Müller, Ann B."
	if diff := cmp.Diff(want, again); diff != "" {
		t.Errorf("the citation read again:\n%s", diff)
	}
	for _, text := range []string{"", "hello", "@", "@article{", "@article{x", "@article{x,", "TY  - JOUR", "TY  - JOUR\nER  - ", strings.Repeat("@", 70000), "@article{x, title = {}}", "\xff@article{x,title={a}}"} {
		if got, err := ReadReference(text); CodeOf(err) != Invalid {
			t.Errorf("%.20q: %+v %v", text, got, err)
		}
	}
}

func FuzzReadReference(f *testing.F) {
	for _, s := range []string{"@article{x, author = {A B and C D}, title = \"{t}\\'e\", pages={1--2}}", "TY  - JOUR\nAU  - A\nER  - ", `@a{b,c={\`, `@a{b,title={\'`, `@a{b,title="\"`} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		r, err := ReadReference(text)
		if err != nil {
			return
		}
		for _, v := range append([]string{r.Title, r.Journal, r.Text, r.DOI, r.Year}, r.Authors...) {
			if !utf8.ValidString(v) || strings.ContainsAny(v, "\n\r") {
				t.Errorf("%q gave %q", text, v)
			}
		}
	})
}

func TestSourceUses(t *testing.T) {
	s := open(t)
	rows := []Row{row("A", 1, 2, 1.2), row("A", 1, 2, 1.3), row("B", 1, 2, 1.4), row("C", 1, 2, 1.5)}
	rows[2].Source, rows[3].Source = "Another 2:2 (2001)", "Another 2:2 (2001)"
	rows[1].Reach = "lower"
	rows[3].Notes = InventedMark
	insert(t, s, rows...)
	freeze(t, s, "r")
	for _, release := range []string{"", "r"} {
		got, err := s.SourceUses(ctx, Filter{Release: release})
		if err != nil || len(got) != 2 || got[0].Citation != "Another 2:2 (2001)" || got[0].Systems != 2 || got[0].Invented || got[1].Measurements != 2 || got[1].Systems != 1 {
			t.Errorf("%+v %v", got, err)
		}
	}
	got, err := s.SourceUses(ctx, Filter{SinuosityMin: Num(1.5)})
	if err != nil || len(got) != 1 || !got[0].Invented {
		t.Errorf("%+v %v", got, err)
	}
}
