package catalogue

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

const head = "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source"

func importText(t testing.TB, s *Store, text string, o ImportOptions) *ImportReport {
	t.Helper()
	rep, err := s.Import(ctx, strings.NewReader(text), o)
	if err != nil {
		t.Fatal(err)
	}
	return rep
}

func export(t testing.TB, s *Store) string {
	t.Helper()
	var b bytes.Buffer
	if _, err := s.Export(ctx, &b, Filter{}); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// awkward are doubles whose shortest texts are long, tiny or at a limit.
var awkward = []float64{0.1, 1.0 / 3, math.Nextafter(1, 2), 1.7976931348623157e9, 5e-324, 2.2250738585072014e-308, 0.30000000000000004, 123456789.12345679, 1e-7, 900719925474.0993}

func TestExportImportIsExact(t *testing.T) {
	s := open(t)
	rng := rand.New(rand.NewPCG(1, 2))
	var rows []Row
	for i := range 40 {
		r := row(fmt.Sprintf("Exact, \"%d\"", i), rng.Float64()*180-90, rng.Float64()*360-180, 1+rng.Float64()*4)
		r.OtherNames, r.ParentDeposit, r.Reach = "=HYPERLINK(1)", "+plus", "'@apostrophe"
		r.Notes = InventedMark + "\nsecond line, with \"quotes\" and 'marks'"
		r.ValleySlope, r.ChannelSlope, r.WaterDepthM = Num(awkward[i%len(awkward)]), Num(-awkward[(i+3)%len(awkward)]), Num(rng.NormFloat64()*1e4)
		r.ChannelWidthM, r.ChannelDepthM = Num(math.Max(awkward[(i+5)%len(awkward)], 1e-300)), Num(rng.ExpFloat64()+1e-9)
		r.AgeMa, r.PalaeolatitudeDeg, r.NetToGross = Num(rng.Float64()*600), Num(rng.Float64()*90), Num(rng.Float64())
		r.Source, r.SourceDOI = "-Survey, of \"things\" 1:1 (2020)", "10.1234/abc,def"
		rows = append(rows, r)
	}
	insert(t, s, rows...)
	first := export(t, s)
	if strings.Contains(first, "\r") || strings.HasPrefix(first, "\ufeff") {
		t.Error("line ends are LF and there is no BOM")
	}
	other := open(t)
	rep := importText(t, other, first, ImportOptions{Publish: true})
	if !rep.Stored || rep.New != 40 || len(rep.Problems) > 0 || len(rep.Conversions) > 0 || len(rep.UnknownColumns) > 0 {
		t.Fatalf("%+v", rep)
	}
	if second := export(t, other); second != first {
		t.Error("the second export differs from the first")
	}
	got, err := other.Rows(ctx, Filter{})
	if err != nil {
		t.Fatal(err)
	}
	for i := range got {
		if d := Diff(&rows[i], &got[i]); len(d) > 0 {
			t.Errorf("row %d: %v", i, d)
		}
		if !got[i].Invented {
			t.Error("invented did not travel")
		}
	}
	for _, text := range []string{first, "\ufeff" + first, strings.ReplaceAll(first, "\n", "\r\n")} {
		rep := importText(t, other, text, ImportOptions{Publish: true})
		if rep.Identical != 40 || rep.New+rep.Changed != 0 || !rep.Stored {
			t.Errorf("importing it again: %+v", rep)
		}
	}
	records, err := csv.NewReader(strings.NewReader(first)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for i, c := range Columns {
		for _, rec := range records[1:] {
			if cell := rec[i]; c.Kind == KindText && cell != "" && strings.ContainsRune("=+-@", rune(cell[0])) {
				t.Errorf("%s: %q would run in a spreadsheet", c.Name, cell)
			}
		}
	}
}

func TestImportRefuses(t *testing.T) {
	const good = "A,10,20,1.5,peak,thalweg,Survey\n"
	for name, c := range map[string]struct {
		text     string
		line     int
		column   string
		value    string
		contains string
		expected string
	}{
		"empty":             {"", 1, "", "", "empty", "header"},
		"wrong header":      {"name,lat\nx,1\n", 1, "system_name", "", "lacks required columns", "first line"},
		"semicolons":        {strings.ReplaceAll(head, ",", ";") + "\nA;10;20;1,5;peak;thalweg;S\n", 1, "", "system_name;latitude_deg;longitude_deg;s...", "semicolons", "commas"},
		"tabs":              {strings.ReplaceAll(head, ",", "\t") + "\n", 1, "", "system_name\tlatitude_deg\tlongitude_deg\ts...", "tabs", "commas"},
		"repeated header":   {head + ",sinuosity\n", 1, "sinuosity", "sinuosity", "twice", "once"},
		"decimal comma":     {head + "\n" + good + "B,10,20,\"1,5\",peak,thalweg,S\n", 3, "sinuosity", "1,5", "decimal comma", "point"},
		"Latin-1":           {head + "\n" + "B\xf6hm,10,20,1.5,peak,thalweg,S\n", 2, "system_name", "B\ufffdhm", "not UTF-8", "UTF-8"},
		"UTF-16":            {"\xff\xfes\x00y\x00", 1, "", "", "UTF-16", "UTF-8"},
		"workbook":          {"PK\x03\x04xxxx", 1, "", "", "workbook", "CSV"},
		"5 MB field":        {head + "\n" + "B,10,20,1.5,peak,thalweg," + strings.Repeat("x", 5<<20) + "\n", 2, "source", strings.Repeat("x", 40) + "...", "5242880 characters", "at most 4000"},
		"sinuosity 0.9":     {head + "\n" + "B,10,20,0.9,peak,thalweg,S\n", 2, "sinuosity", "0.9", "end-to-end", "1 or more"},
		"latitude 91":       {head + "\n" + "B,91,20,1.5,peak,thalweg,S\n", 2, "latitude_deg", "91", "outside", "-90 to 90"},
		"no latitude":       {head + "\n" + "B,,20,1.5,peak,thalweg,S\n", 2, "latitude_deg", "", "required", "number"},
		"unknown choice":    {head + "\n" + "B,1,20,1.5,top,thalweg,S\n", 2, "sinuosity_kind", "top", "choices", "peak, p90"},
		"too few cells":     {head + "\n" + good + "\nB,1,20\n", 4, "", "", "3 cells", "as many"},
		"too many cells":    {head + "\n" + "B,1,20,1.5,peak,thalweg,S,,9\n", 2, "", "", "9 cells", "as many"},
		"bare quote":        {head + "\n" + "B \"x\",1,20,1.5,peak,thalweg,S\n", 2, "", "", "quote", "doubled"},
		"open quote":        {head + "\n" + "\"B,1,20,1.5,peak,thalweg,S\n", 2, "", "", "quote", "doubled"},
		"two units":         {head + ",valley_slope,valley_slope_deg\nB,1,20,1.5,peak,thalweg,S,0.01,0.5\n", 2, "valley_slope_deg", "0.5", "also given in the column valley_slope", "one of the two"},
		"bad ratio":         {head + ",valley_slope_ratio\nB,1,20,1.5,peak,thalweg,S,2:100\n", 2, "valley_slope_ratio", "2:100", "starts with 1", "1:n"},
		"minutes":           {head + "\nB,12 61 S,20,1.5,peak,thalweg,S\n", 2, "latitude_deg", "12 61 S", "below 60", "degrees and minutes"},
		"wrong letter":      {head + "\nB,12 30 E,20,1.5,peak,thalweg,S\n", 2, "latitude_deg", "12 30 E", "other coordinate", "degrees and minutes"},
		"two values":        {head + ",feeder\nB,1,20,1.5,peak,thalweg,S,river\nB,2,20,1.5,peak,thalweg,S,shelf\n", 3, "feeder", "shelf", "line 2 says \"river\"", "one value"},
		"control character": {head + "\nB\x01,1,20,1.5,peak,thalweg,S\n", 2, "system_name", "B\x01", "control character", "text"},
		"blank choice":      {head + "\nB,1,20,1.5,,thalweg,S\n", 2, "sinuosity_kind", "", "write unknown", "one of"},
		"id twice":          {"measurement," + head + "\nx1,B,1,20,1.5,peak,thalweg,S\nx1,B,1,20,1.6,peak,thalweg,S\n", 3, "measurement", "x1", "line 2 has the same id", "once"},
		"1e999":             {head + "\nB,1,20,1e999,peak,thalweg,S\n", 2, "sinuosity", "1e999", "not a number", "number"},
	} {
		t.Run(name, func(t *testing.T) {
			s := open(t)
			for _, publish := range []bool{true, false} {
				rep := importText(t, s, c.text, ImportOptions{Publish: publish})
				if rep.Stored || len(rep.Problems) != 1 {
					t.Fatalf("stored %v, problems %+v", rep.Stored, rep.Problems)
				}
				p := rep.Problems[0]
				if p.Line != c.line || p.Column != c.column || p.Value != c.value || !strings.Contains(p.Message, c.contains) || !strings.Contains(p.Expected, c.expected) {
					t.Errorf("%+v", p)
				}
			}
			if rows, err := s.Rows(ctx, Filter{}); err != nil || len(rows) > 0 {
				t.Errorf("%d rows stored, %v", len(rows), err)
			}
			if n, err := s.CountSubmissions(ctx, "", 0); err != nil || n > 0 {
				t.Errorf("%d submissions stored, %v", n, err)
			}
		})
	}
}

func TestImportReportsEveryBadRowAndKeepsGoodOnesOnlyWhenAsked(t *testing.T) {
	s := open(t)
	text := head + "\nA,10,20,1.5,peak,thalweg,S\nB,91,200,0.5,peak,thalweg,S\nC,1,2,1.5,peak,thalweg,\nD,1,2,1.6,peak,thalweg,S\n,,,,,,\n"
	rep := importText(t, s, text, ImportOptions{Publish: true})
	var where []string
	for _, p := range rep.Problems {
		where = append(where, fmt.Sprint(p.Line, p.Column))
	}
	if got := strings.Join(where, " "); got != "3 latitude_deg 3 sinuosity 4 source" && got != "3latitude_deg 3sinuosity 4source" {
		t.Errorf("problems at %s", got)
	}
	if rep.Stored {
		t.Error("all or nothing")
	}
	rep = importText(t, s, text, ImportOptions{Publish: true, Partial: true})
	rows, _ := s.Rows(ctx, Filter{})
	if !rep.Stored || rep.New != 2 || len(rows) != 2 || len(rep.Problems) != 3 {
		t.Errorf("partial: %+v, %d rows", rep, len(rows))
	}
}

func TestImportConversions(t *testing.T) {
	s := open(t)
	text := "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,source_doi,valley_slope_deg,channel_slope_permille,channel_width_km,age_ka,colour,reach\n" +
		"A,12°34.5'S,170 30 00 W,1.5,peak,thalweg,S,https://doi.org/10.1234/x,0.5,4.2,1.234,11.7,blue,one\n" +
		"B,12.5N,-10:30,1.5,peak,thalweg,S,,,,,,,two\n"
	rep := importText(t, s, text, ImportOptions{Publish: true})
	if !rep.Stored || rep.New != 2 || fmt.Sprint(rep.UnknownColumns) != "[colour]" {
		t.Fatalf("%+v", rep)
	}
	rows, _ := s.Rows(ctx, Filter{})
	a, b := rows[0], rows[1]
	for _, c := range []struct {
		name      string
		got, want float64
		tolerance float64
	}{
		{"latitude", a.LatitudeDeg.V, -(12 + 34.5/60), 1e-12}, {"longitude", a.LongitudeDeg.V, -170.5, 0},
		{"slope of 0.5 degrees", a.ValleySlope.V, 0.00872686779, 1e-11}, // tan(0.5 deg), worked by hand
		{"per mille", a.ChannelSlope.V, 0.0042, 0}, {"width", a.ChannelWidthM.V, 1234, 0}, {"age", a.AgeMa.V, 0.0117, 0},
		{"decimal with letter", b.LatitudeDeg.V, 12.5, 0}, {"with colon", b.LongitudeDeg.V, -10.5, 0},
	} {
		if math.Abs(c.got-c.want) > c.tolerance {
			t.Errorf("%s: %v, want %v", c.name, c.got, c.want)
		}
	}
	if a.SourceDOI != "10.1234/x" {
		t.Errorf("doi %q", a.SourceDOI)
	}
	var shown []string
	for _, p := range rep.Conversions {
		shown = append(shown, fmt.Sprintf("%d %s %s: %s", p.Line, p.Column, p.Value, p.Message))
	}
	for _, want := range []string{"2 latitude_deg 12°34.5'S: read as -12.575 degrees", "2 channel_width_km 1.234: km read as channel_width_m 1234 m", "2 age_ka 11.7: ka read as age_ma 0.0117 Ma", "3 latitude_deg 12.5N: read as 12.5 degrees"} {
		if !strings.Contains(strings.Join(shown, "\n"), want) {
			t.Errorf("not shown: %s\nin %s", want, strings.Join(shown, "\n"))
		}
	}
}

func TestSlopeRatio(t *testing.T) {
	for text, want := range map[string]float64{"1:200": 0.005, "200": 0.005, "1 : 50": 0.02} {
		if got, err := slopeOfRatio(text); err != nil || got != want {
			t.Errorf("%s: %v %v", text, got, err)
		}
	}
	for _, text := range []string{"0", "1:0", "x", "1:x", "2:1"} {
		if _, err := slopeOfRatio(text); err == nil {
			t.Errorf("%s was read", text)
		}
	}
}

func TestImportWarningsDoNotStop(t *testing.T) {
	s := open(t)
	text := head + ",valley_slope\nA,10,20,1.5,peak,thalweg,S,3\nB,10,20,1.5,peak,thalweg,S,-0.01\nC,-10,20,1.5,peak,thalweg,S,0.01\nC,-10.01,20,1.5,peak,thalweg,S,0.01\n"
	rep := importText(t, s, text, ImportOptions{Publish: true})
	if !rep.Stored || rep.New != 4 {
		t.Fatalf("%+v", rep)
	}
	want := map[int]string{2: "slope 3 in the m/m column: is it degrees?", 3: "does not fall downstream", 5: "same source, line, reach name and sinuosity"}
	for line, text := range want {
		found := false
		for _, w := range rep.Warnings {
			found = found || w.Line == line && strings.Contains(w.Message, text)
		}
		if !found {
			t.Errorf("line %d: no warning %q in %+v", line, text, rep.Warnings)
		}
	}
	rows, _ := s.Rows(ctx, Filter{})
	if rows[0].ValleySlope != Num(3) || rows[1].ValleySlope != Num(-0.01) {
		t.Error("warned values are stored as given")
	}
}

func TestImportReviewAndCorrection(t *testing.T) {
	s := open(t)
	text := head + ",feeder\nA,10,20,1.5,peak,thalweg,S,river\nA,11,20,1.6,peak,thalweg,S,\n"
	rep := importText(t, s, text, ImportOptions{})
	if !rep.Stored || rep.New != 2 || rep.Batch == 0 {
		t.Fatalf("%+v", rep)
	}
	if rows, _ := s.Rows(ctx, Filter{}); len(rows) != 0 {
		t.Fatal("not published means not visible")
	}
	if again := importText(t, s, text, ImportOptions{}); again.Identical != 2 || again.New != 0 {
		t.Errorf("the same file waits once: %+v", again)
	}
	if n, err := s.AcceptBatch(ctx, rep.Batch, 0, "fine", nil); n != 2 || err != nil {
		t.Fatal(n, err)
	}
	rows, _ := s.Rows(ctx, Filter{})
	if len(rows) != 2 || rows[1].Feeder != "river" || rows[1].System != rows[0].System {
		t.Fatalf("the second row joins the system of the first: %+v", rows)
	}
	if again := importText(t, s, text, ImportOptions{Publish: true}); again.Identical != 2 || again.New != 0 || len(again.Warnings) > 0 {
		t.Errorf("the accepted file again: %+v", again)
	}
	// A download corrected in one cell of one row proposes one change.
	download := export(t, s)
	corrected := strings.Replace(download, ",1.6,", ",1.65,", 1)
	rep = importText(t, s, corrected, ImportOptions{})
	if rep.Changed != 1 || rep.Identical != 1 || rep.New != 0 || !rep.Stored {
		t.Fatalf("%+v", rep)
	}
	subs, err := s.Submissions(ctx, "submitted", 0)
	if err != nil || len(subs) != 1 || len(subs[0].Changes) != 1 || subs[0].Changes[0] != (FieldChange{"sinuosity", "1.6", "1.65"}) {
		t.Fatalf("%+v %v", subs, err)
	}
	// A system's column corrected in one row changes the system, and the
	// other row's old value does not change it back.
	rep = importText(t, s, strings.Replace(download, ",river,", ",glacial,", 1), ImportOptions{Publish: true, Why: "checked"})
	if rep.Changed != 1 || rep.Identical != 1 {
		t.Fatalf("%+v", rep)
	}
	rows, _ = s.Rows(ctx, Filter{})
	if rows[0].Feeder != "glacial" || rows[1].Feeder != "glacial" {
		t.Errorf("%s %s", rows[0].Feeder, rows[1].Feeder)
	}
	h, err := s.History(ctx, "system:"+rows[0].System)
	if err != nil || h[0].Field != "feeder" || h[0].Before != "river" || h[0].After != "glacial" || h[0].Why != "checked" {
		t.Errorf("%+v %v", h, err)
	}
	// A file with only an id and one column leaves the rest alone.
	rep = importText(t, s, "measurement,channel_width_m\n"+rows[0].Measurement+",450\n", ImportOptions{Publish: true})
	if rep.Changed != 1 || len(rep.Problems) > 0 {
		t.Fatalf("%+v", rep)
	}
	after, _ := s.Rows(ctx, Filter{})
	if d := Diff(&rows[0], &after[0]); len(d) != 1 || d[0] != (FieldChange{"channel_width_m", "", "450"}) {
		t.Error(d)
	}
}

func TestImportWarnsOfAnIdFromElsewhere(t *testing.T) {
	s := open(t)
	insert(t, s, row("Mine", 1, 2, 1.5))
	rep := importText(t, s, "measurement,"+head+"\nm000001,Theirs,50,60,1.7,peak,thalweg,Other\n", ImportOptions{})
	if rep.Changed != 1 || len(rep.Warnings) != 1 || !strings.Contains(rep.Warnings[0].Message, "another catalogue") {
		t.Errorf("%+v", rep)
	}
}

// One measurement moved to another system by its slug.
func TestImportMovesAMeasurement(t *testing.T) {
	s := open(t)
	rows := insert(t, s, row("A", 1, 2, 1.5), row("B", 3, 4, 1.6))
	rep := importText(t, s, "measurement,system\n"+rows[0].Measurement+","+rows[1].System+"\n", ImportOptions{Publish: true})
	if rep.Changed != 1 {
		t.Fatalf("%+v", rep)
	}
	systems, total, err := s.Systems(ctx, Filter{})
	if err != nil || total != 1 || len(systems[0].Measurements) != 2 || systems[0].Name != "B" || systems[0].Slug != "b" {
		t.Errorf("%+v %v", systems, err)
	}
	if faults, err := s.Integrity(ctx); err != nil || len(faults) > 0 {
		t.Error(faults, err)
	}
}
