package catalogue

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"testing"
)

// person makes an account.
func person(t testing.TB, s *Store, name, role string) int64 {
	t.Helper()
	a, err := s.AddAccount(ctx, name, "Credit of "+name, role, "ebb and flood 42")
	if err != nil {
		t.Fatal(err)
	}
	return a.ID
}

// checked sends a file, reads it as guessed but for what set changes, and
// checks it.
func checked(t testing.TB, s *Store, by int64, file string, set func(*Reading)) *Upload {
	t.Helper()
	id, err := s.NewUpload(ctx, by, "table.csv", "a table", strings.NewReader(file))
	if err != nil {
		t.Fatal(err)
	}
	u, err := s.Upload(ctx, id, by)
	if err != nil {
		t.Fatal(err)
	}
	r := Reading{Encoding: u.Look.Encoding, Separator: u.Look.Separator, Numbers: u.Look.Numbers, Licence: "CC0 1.0"}
	for _, g := range GuessColumns(u.Look.Header) {
		r.Columns = append(r.Columns, g.Name)
	}
	if set != nil {
		set(&r)
	}
	if err := s.SetReading(ctx, id, by, r, "a table"); err != nil {
		t.Fatal(err)
	}
	if err := s.StartCheck(ctx, id, by); err != nil {
		t.Fatal(err)
	}
	if err := s.CheckUpload(ctx, id); err != nil {
		t.Fatal(err)
	}
	if u, err = s.Upload(ctx, id, by); err != nil {
		t.Fatal(err)
	}
	return u
}

func problemsOf(t testing.TB, s *Store, id int64, kind string) (out []RowProblem) {
	t.Helper()
	if err := s.Remarks(ctx, id, kind, 1000, func(p RowProblem) error { out = append(out, p); return nil }); err != nil {
		t.Fatal(err)
	}
	return out
}

// The headers are as authors write them; what each stands for is read by hand.
func TestGuessColumns(t *testing.T) {
	for header, want := range map[string]string{
		"latitude_deg": "latitude_deg", "Lat": "latitude_deg", "LATITUDE (°)": "latitude_deg", "lon": "longitude_deg", "Longitude [deg]": "longitude_deg",
		"slope (deg)": "valley_slope_deg", "Slope (‰)": "valley_slope_permille", "gradient, m/km": "valley_slope_permille", "slope (%)": "valley_slope_percent",
		"Valley slope (m/m)": "valley_slope", "slope 1:n": "", "Width (km)": "channel_width_km", "width_m": "channel_width_m", "Channel depth (ft)": "channel_depth_ft",
		"Age (Ma)": "age_ma", "age (ka)": "age_ka", "Channel name": "system_name", "Référence": "source", "reference": "source", "DOI": "source_doi",
		"Sinuosity index": "sinuosity", "wavelength (km)": "wavelength_km", "Fan": "parent_deposit", "colour": "", "": "", "λ": "", "valley_slope_deg": "valley_slope_deg",
		"sinuosity (dimensionless)": "sinuosity", "net:gross": "net_to_gross",
	} {
		if got := GuessColumns([]string{header})[0].Name; got != want {
			t.Errorf("%q is taken for %q, want %q", header, got, want)
		}
	}
	twice := GuessColumns([]string{"Latitude", "lat", "latitude_deg"})
	if twice[0].Name != "" || twice[1].Name != "" || !twice[2].Sure {
		t.Errorf("one column is given out twice, or not to the surest: %+v", twice)
	}
	for column, list := range synonyms {
		if _, ok := columnByName[column]; !ok {
			t.Errorf("%s is no column", column)
		}
		for _, s := range list {
			if s != foldHeader(s) {
				t.Errorf("synonym %q of %s is not folded: %q", s, column, foldHeader(s))
			}
		}
	}
}

func TestLookAtFiles(t *testing.T) {
	for name, c := range map[string]struct {
		file                        string
		encoding, separator, number string
		rows                        int
		fault                       string
	}{
		"the contract's":      {"sinuosity,notes\n1.5,a\n2.5,b\n", "utf-8", ",", DecimalPoint, 2, ""},
		"with a mark":         {"\ufeffsinuosity,notes\n1.5,a\n", "utf-8", ",", DecimalPoint, 1, ""},
		"semicolons":          {"sinuosity;notes\r\n1,5;a, b, c, d\r\n", "utf-8", ";", DecimalComma, 1, ""},
		"tabs":                {"sinuosity\tnotes\n1.5\ta;b;c\n", "utf-8", "\t", DecimalPoint, 1, ""},
		"latin":               {"sinuosity;notes\n1,5;K\xf6nig\n", "", ";", DecimalComma, 1, ""},
		"UTF-16":              {"\xff\xfea\x00,\x00b\x00\n\x001\x00,\x002\x00\n\x00", "utf-16", ",", DecimalPoint, 1, ""},
		"groups":              {"width;age\n1.200,5;3\n", "utf-8", ";", DecimalCommaGroups, 1, ""},
		"groups with points":  {"width;age\n1,200.5;3\n", "utf-8", ";", DecimalPointGroups, 1, ""},
		"a nought in front":   {"slope;age\n0,004;3\n", "utf-8", ";", DecimalComma, 1, ""},
		"two readings":        {"width;age\n1,200;3\n", "utf-8", ";", "", 1, ""},
		"two readings, one":   {"width;age\n1,200;3,5\n", "utf-8", ";", "", 1, ""},
		"both hands":          {"width;age\n1,25;3.5\n", "utf-8", ";", "", 1, ""},
		"a quoted separator":  {"\"a;b;c;d;e\",\"f\"\n1,2\n", "utf-8", ",", DecimalPoint, 1, ""},
		"no rows":             {"a,b\n", "utf-8", ",", DecimalPoint, 0, ""},
		"nothing":             {"", "", "", "", 0, "empty"},
		"a workbook":          {"PK\x03\x04", "", "", "", 0, "workbook"},
		"too many columns":    {strings.Repeat("a,", MostColumns) + "b\n", "utf-8", ",", "", 0, "201 columns"},
		"a quote without end": {"a,b\n\"" + strings.Repeat("x\n", 100), "utf-8", ",", DecimalPoint, 0, ""},
	} {
		t.Run(name, func(t *testing.T) {
			l, err := lookAt(ctx, func() io.Reader { return strings.NewReader(c.file) }, Reading{})
			if err != nil {
				t.Fatal(err)
			}
			if c.fault != "" {
				if !strings.Contains(l.Fault, c.fault) {
					t.Errorf("fault %q, want %q", l.Fault, c.fault)
				}
				return
			}
			if l.Encoding != c.encoding || l.Separator != c.separator || l.Numbers != c.number || l.Fault != "" || (c.rows > 0 && l.Rows != c.rows) {
				t.Errorf("%+v", l)
			}
		})
	}
	l, _ := lookAt(ctx, func() io.Reader { return strings.NewReader("a,A,b,c,B\n1,2,3,4,5\n") }, Reading{})
	if !slices.Equal(l.Repeated, []string{"A", "B"}) {
		t.Errorf("repeated: %v", l.Repeated)
	}
	// A character cut by the end of a piece is not a fault of the file.
	for cut := range 4 {
		if l, _ := lookAt(ctx, func() io.Reader { return strings.NewReader("a,b\n" + strings.Repeat("x", 65535-4-cut) + "λ,1\n") }, Reading{}); l.Encoding != "utf-8" {
			t.Errorf("cut %d: %q", cut, l.Encoding)
		}
	}
}

// A table as it stands in a paper: other words, other units, semicolons,
// decimal commas, Latin-1. Expected values worked out by hand: tan(0.5 deg) =
// 0.0087268677907587893, 2.4 km = 2400 m, 100 ft = 30.48 m.
func TestUploadOfAnotherHand(t *testing.T) {
	s := open(t)
	ann := person(t, s, "ann", "contributor")
	file := "Channel;Lat;Long;Sinuosity;Statistic;Line;Reference;Slope (\xb0);Width (km);Depth (ft);colour\n" +
		"L\xf6om;-30,5;-20;1,4;peak;thalweg;M\xfcller 2031;0,5;2,4;100;red\n" +
		"Weft;12 30,5 S;-21;1,5;mean;centreline;M\xfcller 2031;;;;blue\n"
	u := checked(t, s, ann, file, func(r *Reading) { r.Encoding = "windows-1252" })
	if u.State != "checked" || u.Report.New != 2 || u.Report.Problems != 0 || u.Report.Rows != 2 {
		t.Fatalf("%s %+v %v", u.State, u.Report, problemsOf(t, s, u.ID, "problem"))
	}
	batch, err := s.SendUpload(ctx, u.ID, ann, false)
	if err != nil || batch == 0 {
		t.Fatal(err)
	}
	waiting, err := s.Submissions(ctx, "submitted", ann)
	if err != nil || len(waiting) != 2 {
		t.Fatalf("%d wait, %v", len(waiting), err)
	}
	r := waiting[0].Row
	if r.SystemName != "Löom" || r.Source != "Müller 2031" || r.LatitudeDeg != Num(-30.5) || r.ChannelWidthM != Num(2400) || r.Licence != "CC0 1.0" || r.Contributor != "Credit of ann" {
		t.Errorf("%+v", r)
	}
	if d := r.ChannelDepthM.V - 30.48; d > 1e-12 || d < -1e-12 {
		t.Errorf("100 ft are %v m", r.ChannelDepthM.V)
	}
	if d := r.ValleySlope.V - 0.0087268677907587893; d > 1e-15 || d < -1e-15 {
		t.Errorf("0.5 degrees are %v", r.ValleySlope.V)
	}
	if lat := waiting[1].Row.LatitudeDeg; lat != Num(-(12 + 30.5/60)) {
		t.Errorf("12 30,5 S is %v", lat)
	}
	if u, err = s.Upload(ctx, u.ID, ann); err != nil || u.State != "sent" || u.Batch != batch || u.Report.Sent != 2 {
		t.Errorf("%+v, %v", u, err)
	}
	if _, err := s.SendUpload(ctx, u.ID, ann, false); CodeOf(err) != Conflict {
		t.Errorf("sent twice: %v", err)
	}
	again := checked(t, s, ann, file, func(r *Reading) { r.Encoding = "windows-1252" })
	if again.Report.Identical != 2 || again.Report.Good() != 0 {
		t.Errorf("the same file again: %+v", again.Report)
	}
}

func TestUploadGoodRowsOrNone(t *testing.T) {
	s := open(t)
	ann, bo := person(t, s, "ann", "contributor"), person(t, s, "bo", "contributor")
	head := "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source\n"
	file := head + "Loom,-30,-20,1.4,peak,thalweg,Invented 2031\nBad,91,-20,0.9,peak,thalweg,Invented 2031\nBad,1,-20,3 +- 6,peak,thalweg,Invented 2031\n" +
		"Bad,1,-20,\"1,200\",peak,thalweg,Invented 2031\n"
	u := checked(t, s, ann, file, func(r *Reading) { r.Numbers = DecimalPoint })
	if u.Report.New != 1 || u.Report.Refused != 3 || u.Report.Problems != 4 {
		t.Fatalf("%+v", u.Report)
	}
	said := fmt.Sprint(problemsOf(t, s, u.ID, "problem"))
	for _, want := range []string{"below 1", "-90 to 90", "holds a value and its error; write 3 here", "sinuosity_se", `"1,200" can be read in two ways; write 1.200 or 1200`} {
		if !strings.Contains(said, want) {
			t.Errorf("%s does not say %q", said, want)
		}
	}
	if _, err := s.SendUpload(ctx, u.ID, ann, false); CodeOf(err) != Conflict {
		t.Errorf("sent with refused rows: %v", err)
	}
	for what, err := range map[string]error{
		"see":  func() error { _, err := s.Upload(ctx, u.ID, bo); return err }(),
		"send": func() error { _, err := s.SendUpload(ctx, u.ID, bo, true); return err }(),
		"drop": s.DropUpload(ctx, u.ID, bo), "read": s.SetReading(ctx, u.ID, bo, Reading{}, ""), "check": s.StartCheck(ctx, u.ID, bo), "stop": s.StopCheck(ctx, u.ID, bo),
	} {
		if CodeOf(err) != NotFound {
			t.Errorf("another person may %s it: %v", what, err)
		}
	}
	if _, err := s.SendUpload(ctx, u.ID, ann, true); err != nil {
		t.Fatal(err)
	}
	if n, _ := s.CountSubmissions(ctx, "submitted", ann); n != 1 {
		t.Errorf("%d wait, want 1", n)
	}
	if u := checked(t, s, ann, "a,b\n1,2\n", nil); u.Report.Good() != 0 || !strings.Contains(fmt.Sprint(problemsOf(t, s, u.ID, "problem")), "lacks required columns") {
		t.Errorf("a table of something else: %+v", u.Report)
	} else if _, err := s.SendUpload(ctx, u.ID, ann, true); CodeOf(err) != Conflict {
		t.Errorf("nothing was sent: %v", err)
	}
	long := checked(t, s, ann, head[:len(head)-1]+",notes\nLoom,-30,-20,1.4,peak,thalweg,Invented 2032,"+strings.Repeat("n", 10<<20)+"\n", nil)
	if long.Report.Problems != 1 || !strings.Contains(fmt.Sprint(problemsOf(t, s, long.ID, "problem")), "characters long") {
		t.Errorf("10 MB of notes: %+v", long.Report)
	}
}

func TestUploadStopsAndGoesOn(t *testing.T) {
	s := open(t)
	ann := person(t, s, "ann", "contributor")
	file := manyRows(3000)
	u := checked(t, s, ann, file, nil)
	if u.Report.New != 3000 || u.RowsRead != 3000 || u.BytesRead != int64(len(file)) {
		t.Fatalf("%+v", u)
	}
	if err := s.StartCheck(ctx, u.ID, ann); err != nil {
		t.Fatal(err)
	}
	// The program stops in the middle: the file still waits to be checked, and
	// is, to the same end.
	cut, stop := context.WithCancel(ctx)
	stop()
	if err := s.CheckUpload(cut, u.ID); !errors.Is(err, context.Canceled) {
		t.Errorf("cut off: %v", err)
	}
	if list, err := s.UnfinishedUploads(ctx); err != nil || len(list) != 1 {
		t.Fatalf("%d unfinished, %v", len(list), err)
	}
	if err := s.CheckUpload(ctx, u.ID); err != nil {
		t.Fatal(err)
	}
	if u, _ = s.Upload(ctx, u.ID, ann); u.State != "checked" || u.Report.New != 3000 {
		t.Errorf("%+v", u)
	}
	// Cancelled by its sender: the check ends at its next step and leaves
	// nothing.
	if err := s.StartCheck(ctx, u.ID, ann); err != nil {
		t.Fatal(err)
	}
	if err := s.StopCheck(ctx, u.ID, ann); err != nil {
		t.Fatal(err)
	}
	if err := s.CheckUpload(ctx, u.ID); err != nil {
		t.Error(err)
	}
	if u, _ = s.Upload(ctx, u.ID, ann); u.State != "matching" || u.Report.New != 0 {
		t.Errorf("%+v", u)
	}
	if err := s.DropUpload(ctx, u.ID, ann); err != nil {
		t.Fatal(err)
	}
	for _, table := range []string{"uploads", "upload_pieces", "upload_rows", "upload_remarks"} {
		var n int
		if err := s.r.QueryRowContext(ctx, `SELECT count(*) FROM `+table).Scan(&n); err != nil || n != 0 {
			t.Errorf("%s holds %d, %v", table, n, err)
		}
	}
}

func TestUploadsAreFew(t *testing.T) {
	s := open(t)
	ann := person(t, s, "ann", "contributor")
	for range mostUploads {
		if _, err := s.NewUpload(ctx, ann, `C:\tables\a.csv`, "", strings.NewReader("a,b\n")); err != nil {
			t.Fatal(err)
		}
	}
	if _, err := s.NewUpload(ctx, ann, "a.csv", "", strings.NewReader("a,b\n")); CodeOf(err) != Conflict {
		t.Errorf("one too many: %v", err)
	}
	list, err := s.Uploads(ctx, ann, 100)
	if err != nil || len(list) != mostUploads || list[0].Name != "a.csv" {
		t.Errorf("%+v, %v", list, err)
	}
}

// manyRows is a table of n rows in the columns of another hand.
func manyRows(n int) string {
	var b strings.Builder
	b.WriteString("Channel;Fan;Lat;Lon;Sinuosity;Statistic;Line;Reference;Slope (deg);Width (km)\n")
	for i := range n {
		fmt.Fprintf(&b, "Sound %d;Deposit %d;%d,%d;%d,5;1,%02d;peak;thalweg;Invented Soundings %d;0,%02d;1,%d\n", i, i/5, i%120-60, i%10, i%340-170, 1+i%98, 1+i%40, 1+i%50, 1+i%9)
	}
	return b.String()
}

// BenchmarkUpload checks and sends 50,000 rows.
func BenchmarkUpload(b *testing.B) {
	file := manyRows(50_000)
	for b.Loop() {
		s := open(b)
		ann := person(b, s, "ann", "contributor")
		u := checked(b, s, ann, file, nil)
		if _, err := s.SendUpload(ctx, u.ID, ann, false); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkUploadCheck is the check alone: what a person waits for.
func BenchmarkUploadCheck(b *testing.B) {
	s := open(b)
	ann := person(b, s, "ann", "contributor")
	u := checked(b, s, ann, manyRows(50_000), nil)
	for b.Loop() {
		if err := s.StartCheck(ctx, u.ID, ann); err != nil {
			b.Fatal(err)
		}
		if err := s.CheckUpload(ctx, u.ID); err != nil {
			b.Fatal(err)
		}
	}
}

func FuzzLook(f *testing.F) {
	f.Add([]byte("a;b\n1,5;2\n"))
	f.Add([]byte("\xff\xfea\x00"))
	f.Add([]byte("\"a\nb\",c\n\xe9,1,200\n"))
	f.Fuzz(func(t *testing.T, b []byte) {
		l, err := lookAt(ctx, func() io.Reader { return strings.NewReader(string(b)) }, Reading{})
		if err != nil {
			t.Fatal(err)
		}
		if l.Fault == "" && len(GuessColumns(l.Header)) != len(l.Header) {
			t.Error("a guess for each column is missing")
		}
		for _, row := range l.Sample {
			if len(row) > len(l.Header) {
				t.Errorf("a sample row of %d cells under %d", len(row), len(l.Header))
			}
		}
	})
}
