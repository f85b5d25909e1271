package main

import (
	"archive/zip"
	"context"
	"crypto/sha256"
	"embed"
	"encoding/csv"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"hash"
	"io"
	"path"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// The licences in full, from the SPDX list of licences.
//
//go:embed licences/*.txt
var licenceTexts embed.FS

// packageMeta describes a table that is taken away: a release, or the catalogue
// as it is.
type packageMeta struct {
	Title, Version string
	Notes          string
	Licence        string // SPDX name
	DOI            string
	Authors        []catalogue.Author
	At             time.Time // of the files in the package
	Systems        int
	Measurements   int
	Invented       int
	Release        string // "" = the catalogue as it is
	Filtered       string // the filter, as a query; "" = all of it
	Identity       string // names the data set where there is no DOI
}

// description says what the data are, in a few sentences.
func (p *packageMeta) description() string {
	s := fmt.Sprintf("Planform measurements of channels, most of them submarine: %d measurements of %d systems, each with its place, sinuosity, slope, size and setting where known, how it was measured, and the source it comes from.", p.Measurements, p.Systems)
	if p.Filtered != "" {
		s += " Only the rows under the filter " + p.Filtered + "."
	}
	if p.Invented > 0 {
		s += " " + inventedOf(p.Invented, p.Measurements) + " They are marked at the start of their notes; draw no conclusion about nature from them."
	}
	return s
}

// metaOfRelease takes only what was frozen, so that the package of a release is
// the same for ever; a DOI entered later is not in it.
func metaOfRelease(r *catalogue.Release) *packageMeta {
	return &packageMeta{Title: r.Title, Version: r.Name, Notes: r.Notes, Licence: r.Licence, DOI: r.FrozenDOI, Authors: r.Authors, At: r.At,
		Systems: r.Systems, Measurements: r.Measurements, Invented: r.Invented, Release: r.Name, Identity: r.Checksum}
}

// metaOfCatalogue describes the rows under a filter of the catalogue as it is.
func (a *App) metaOfCatalogue(ctx context.Context, f catalogue.Filter) (*packageMeta, error) {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	title, err := a.store.Title(ctx)
	if err != nil {
		return nil, err
	}
	p := &packageMeta{Title: title, Version: "unreleased, revision " + strconv.FormatInt(rev, 10), Filtered: f.Values().Encode()}
	if p.At, err = a.store.LastChange(ctx); err != nil {
		return nil, err
	}
	if p.Identity, err = a.store.State(ctx); err != nil {
		return nil, err
	}
	sum, err := a.store.Summary(ctx, f)
	if err != nil {
		return nil, err
	}
	p.Systems, p.Measurements, p.Invented, p.Authors, p.Licence = sum.Systems, sum.Measurements, sum.Invented, sum.Authors, sum.Licence
	return p, nil
}

// systemsPackage is the data package of the rows under a filter.
func (a *App) systemsPackage(c echo.Context) error {
	_, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	f.Page, f.PerPage = 0, 0
	var r *catalogue.Release
	if f.Release != "" {
		name, err := a.store.ReleaseName(c.Request().Context(), f.Release)
		if err != nil {
			return err
		}
		if r, err = a.store.Release(c.Request().Context(), name); err != nil {
			return err
		}
	}
	return a.packageOf(c, f, r)
}

// packageOf streams the data package of the rows under f. A whole release is
// described by what was frozen, a part of one, and the catalogue as it is, by
// what is in it.
func (a *App) packageOf(c echo.Context, f catalogue.Filter, r *catalogue.Release) error {
	ctx := c.Request().Context()
	whole := f
	whole.Release = ""
	var meta *packageMeta
	if r != nil && len(whole.Values()) == 0 {
		meta = metaOfRelease(r)
	} else {
		var err error
		if meta, err = a.metaOfCatalogue(ctx, f); err != nil {
			return err
		}
		if r != nil {
			meta.Title, meta.Version, meta.Release, meta.At, meta.Identity = r.Title, "part of "+r.Name, r.Name, r.At, r.Checksum
		}
	}
	if done, err := a.download(c, "application/zip", fileName("package", meta.Release, ".zip"), meta.Release); done || err != nil {
		return err
	}
	return a.stream(c, func(w *patientWriter) error { return a.writePackage(ctx, w, f, meta) })
}

// packer writes the files of a package one after the other, so that none is
// held in memory, and notes length and sum of each.
type packer struct {
	zip   *zip.Writer
	at    time.Time
	files []packedFile
}

type packedFile struct {
	name  string
	bytes int64
	sum   string
}

// add writes one file. Its time is that of the data: equal data give equal
// bytes.
func (p *packer) add(name string, write func(w io.Writer) error) error {
	h := &zip.FileHeader{Name: name, Method: zip.Deflate, Modified: p.at.UTC()}
	h.SetMode(0o644)
	to, err := p.zip.CreateHeader(h)
	if err != nil {
		return err
	}
	m := &meter{hash: sha256.New()}
	if err := write(io.MultiWriter(to, m)); err != nil {
		return err
	}
	p.files = append(p.files, packedFile{name, m.n, hex.EncodeToString(m.hash.Sum(nil))})
	return nil
}

func (p *packer) text(name, text string) error {
	return p.add(name, func(w io.Writer) error { _, err := io.WriteString(w, text); return err })
}

func (p *packer) json(name string, v any) error {
	b, err := json.MarshalIndent(v, "", "  ")
	if err != nil {
		return err
	}
	return p.text(name, string(b)+"\n")
}

func (p *packer) of(name string) packedFile {
	for _, f := range p.files {
		if f.name == name {
			return f
		}
	}
	return packedFile{}
}

type meter struct {
	hash hash.Hash
	n    int64
}

func (m *meter) Write(b []byte) (int, error) {
	m.n += int64(len(b))
	return m.hash.Write(b)
}

// writePackage writes the tables, then what describes them, then the sums.
func (a *App) writePackage(ctx context.Context, w io.Writer, f catalogue.Filter, meta *packageMeta) error {
	if meta.At.Year() < 1980 { // what a zip file can hold
		meta.At = time.Date(1980, 1, 1, 0, 0, 0, 0, time.UTC)
	}
	p := &packer{zip: zip.NewWriter(w), at: meta.At}
	licence, err := licenceTexts.ReadFile(path.Join("licences", meta.Licence+".txt"))
	if err != nil {
		return err
	}
	steps := []func() error{
		func() error {
			return p.add("measurements.csv", func(w io.Writer) error { _, err := a.store.Export(ctx, w, f); return err })
		},
		func() error {
			return p.add("systems.csv", func(w io.Writer) error { return a.packSystems(ctx, w, f) })
		},
		func() error {
			return p.add("sources.csv", func(w io.Writer) error { return a.packSources(ctx, w, f) })
		},
		func() error {
			return p.add("sources.bib", func(w io.Writer) error { return a.writeSources(ctx, w, f, catalogue.BibTeX) })
		},
		func() error {
			return p.add("centrelines.geojson", func(w io.Writer) error { return a.writeLines(ctx, w, f) })
		},
		func() error {
			return p.add("dictionary.csv", func(w io.Writer) error { return writeDictionary(w) })
		},
		func() error { return p.text("CITATION.cff", citationCFF(meta)) },
		func() error { return p.text("LICENSE.txt", licenceNotice(meta)+string(licence)) },
		func() error { return p.text("README.txt", packageReadme(meta)) },
		func() error { return p.json("datapackage.json", dataPackage(p, meta)) },
		func() error { return p.json("csv-metadata.json", csvOnTheWeb(meta)) },
		func() error { return p.text("SHA256SUMS", p.sums()) },
	}
	for _, step := range steps {
		if err := step(); err != nil {
			return err
		}
	}
	return p.zip.Close()
}

// sums is what sha256sum -c reads.
func (p *packer) sums() string {
	var b strings.Builder
	for _, f := range p.files {
		b.WriteString(f.sum + "  " + f.name + "\n")
	}
	return b.String()
}

// systemTableColumns are the columns of systems.csv: those of the whole system.
func systemTableColumns() []catalogue.Column {
	var out []catalogue.Column
	for _, c := range catalogue.Columns {
		if c.Table == catalogue.TableSystems && c.Name != "measurement" {
			out = append(out, c)
		}
	}
	return out
}

// packSystems writes one row a system: the columns of the whole system and the
// number of its measurements in measurements.csv.
func (a *App) packSystems(ctx context.Context, w io.Writer, f catalogue.Filter) error {
	out := csv.NewWriter(w)
	cols := systemTableColumns()
	record := make([]string, len(cols)+2)
	for i, c := range cols {
		record[i] = c.Name
	}
	record[len(cols)], record[len(cols)+1] = "measurements", "invented"
	if err := out.Write(record); err != nil {
		return err
	}
	counts, err := a.store.SystemCounts(ctx, f)
	if err != nil {
		return err
	}
	f.Sort = ""
	err = a.store.EachSystem(ctx, f, func(r catalogue.Row) error {
		for i, c := range cols {
			record[i] = c.Get(&r)
			if c.Kind == catalogue.KindText {
				record[i] = catalogue.Neutralise(record[i])
			}
		}
		record[len(cols)], record[len(cols)+1] = itoa(counts[r.System]), "no"
		if r.Invented {
			record[len(cols)+1] = "yes"
		}
		return out.Write(record)
	})
	out.Flush()
	if err == nil {
		err = out.Error()
	}
	return err
}

// packSources writes one row a source of a sinuosity.
func (a *App) packSources(ctx context.Context, w io.Writer, f catalogue.Filter) error {
	uses, err := a.store.SourceUses(ctx, f)
	if err != nil {
		return err
	}
	return writeSourceTable(w, uses)
}

func licenceNotice(p *packageMeta) string {
	s := fmt.Sprintf("%s, version %s, is given under %s (%s).\n", p.Title, p.Version, views.LicenceName(p.Licence), views.LicenceAddress(p.Licence))
	if p.Licence != "CC0-1.0" {
		s += "Rows contributed under CC0 say so in the column licence and stay under CC0.\n"
	}
	return s + "\n" + strings.Repeat("-", 72) + "\n\n"
}

func packageReadme(p *packageMeta) string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s\nVersion %s, %s\n\n%s\n\n", p.Title, p.Version, p.At.UTC().Format("2006-01-02"), p.description())
	b.WriteString(`measurements.csv     one row a measurement, all columns
systems.csv          one row a system: the columns that belong to the whole system
sources.csv          one row a source, with the measurements that rest on it
sources.bib          the same for a bibliography (BibTeX)
centrelines.geojson  the stored lines, upstream to downstream, WGS84; third coordinate elevation in m
dictionary.csv       what each column means, its unit, and what it may hold
datapackage.json     the tables described for programs (Frictionless Data Package 1.0)
csv-metadata.json    the same as CSV on the Web
CITATION.cff         how to cite
LICENSE.txt          the licence
SHA256SUMS           checksums of all these files: sha256sum -c SHA256SUMS

Tables are RFC 4180 CSV in UTF-8 with a header row; a cell that is not given is
empty. A text cell that a spreadsheet would run as a formula has an apostrophe
before it, which is no part of the text.
`)
	if p.Notes != "" {
		b.WriteString("\n" + p.Notes + "\n")
	}
	return b.String()
}
