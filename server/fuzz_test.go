package main

import (
	"net/url"
	"strings"
	"testing"

	"fathombend/catalogue"
)

// refusal fails the test unless err names what is wrong with the input: no
// input may end as a fault of this side.
func refusal(t *testing.T, err error) {
	t.Helper()
	if p := problemOf(err); p.Status >= 500 || strings.TrimSpace(p.Detail) == "" {
		t.Fatalf("%v is no refusal", err)
	}
}

// FuzzExpectationQuery: a target is refused with a sentence, or holds numbers
// that are numbers.
func FuzzExpectationQuery(f *testing.F) {
	for _, q := range []string{"palaeolatitude=42&age=70", "inclination=-55&a95=5&flattening=0.6&unit=Maastrichtian", "site_lat=1&site_lon=2&plate=africa&age=30", "palaeolatitude=1&age=0&target_slope_deg=0.3&day=given&day_length_h=22",
		"site_lat=1&site_lon=2&euler_lat=3&euler_lon=4&euler_angle=-20&euler_error=1&age_se=3", "palaeolatitude=90.0001", "draws=4000&seed=1&age=1e400", "kind=river&target_feeder=river&observed_sinuosity=0"} {
		f.Add(q)
	}
	f.Fuzz(func(t *testing.T, query string) {
		q, err := url.ParseQuery(query)
		if err != nil {
			return
		}
		_, target, err := expectationQuestion(q)
		if err != nil {
			refusal(t, err)
			return
		}
		for name, v := range map[string]float64{"age": target.Age, "age_se": target.AgeSE} {
			if v < 0 {
				t.Fatalf("%s = %g was taken", name, v)
			}
		}
	})
}

// FuzzMeasureSettings: settings are read, or what is wrong stands by its name.
func FuzzMeasureSettings(f *testing.F) {
	for _, q := range []string{"spacing_m=10&smooth=3&k=5", "epsg=32631&z=depth", "epsg=plane&direction=reversed", "window_m=-1&width_m=1e300", "k=99999999999999999999"} {
		f.Add(q)
	}
	f.Fuzz(func(t *testing.T, query string) {
		q, err := url.ParseQuery(query)
		if err != nil {
			return
		}
		s, wrong := measureSettings(q)
		for name, message := range wrong {
			if name == "" || strings.TrimSpace(message) == "" {
				t.Fatalf("%q: a refusal without a word", name)
			}
		}
		if len(wrong) == 0 && (s.SpacingM < 0 || s.WidthM < 0 || s.WindowM < 0 || !isFinite(s.SpacingM+s.WidthM+s.WindowM)) {
			t.Fatalf("%+v was taken", s)
		}
	})
}

// FuzzRecordForm: whatever a form of a contribution holds, it is read, and what
// cannot be read is kept as typed and said.
func FuzzRecordForm(f *testing.F) {
	for _, q := range []string{"system_name=A&latitude_deg=12+30+S&longitude_deg=20&sinuosity=1.5&sinuosity_kind=peak&measured_line=thalweg&source=S", "latitude_deg=x&sinuosity=0.5&age_ma.unit=age_ka&age_ma=3", "valley_slope=1:20&valley_slope.unit=valley_slope_ratio", "override.x=y&message=%00&centreline=%7B"} {
		f.Add(q)
	}
	f.Fuzz(func(t *testing.T, query string) {
		q, err := url.ParseQuery(query)
		if err != nil {
			return
		}
		r := readRecord(q)
		r.take(catalogue.CheckRow(&r.row, nil))
		_, _ = r.summary()
		_ = r.groups()
		for name := range r.errors {
			if strings.TrimSpace(r.errors[name]) == "" {
				t.Fatalf("%s is refused without a word", name)
			}
		}
	})
}

// FuzzReturnAddress: a return path never leads to another site.
func FuzzReturnAddress(f *testing.F) {
	for _, p := range []string{"/account", "//evil.example", "/\\evil", "https://x/", "/a\r\nb", "/%2f/evil", "/\t/evil"} {
		f.Add(p)
	}
	f.Fuzz(func(t *testing.T, path string) {
		to := localPath(path)
		base, _ := url.Parse("http://here.example/sign-in")
		u, err := base.Parse(to)
		if err != nil || u.Host != "here.example" || !strings.HasPrefix(to, "/") || strings.HasPrefix(to, "//") || strings.ContainsAny(to, "\\\r\n") {
			t.Fatalf("%q leads to %q", path, to)
		}
	})
}

// FuzzTargets: every line of a table of targets keeps its place.
func FuzzTargets(f *testing.F) {
	for _, s := range []string{"name,palaeolatitude,age\nA,42,70\nB,x,70\n", "\ufeffage;site_lat\n1;2\n", "a\n\"", "palaeolatitude,palaeolatitude\n1,2\n", "name,age\n\"x\n,1\n"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, table string) {
		targets, err := fewTargets(table, url.Values{})
		if err != nil {
			refusal(t, err)
			return
		}
		_ = targets
	})
}
