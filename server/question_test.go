package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"net/url"
	"reflect"
	"strings"
	"testing"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/expectation"
)

// FuzzRegressionQuestion: any query is read or refused with its parameter, and
// what was read is asked again by the address made from it.
func FuzzRegressionQuestion(f *testing.F) {
	for _, q := range []string{
		"", "model=linear:coriolis", "model=power:valley_slope&model=broken_line:abs_latitude&seed=9007199254740991",
		"joint=valley_slope,feeder&interaction=valley_slope,feeder&group=kind&level=0.9", "thin_straight=0.25&thin_sinuous=0.5&measurement_error=yes&k=7",
		"model=linear:coriolis&model=&lat_min=-3&kind=river&bbox=170,-20,-170,10", "seed=1&seed=2", "resamples=1e3", "level=NaN", "model=%00", "q=%ff",
	} {
		f.Add(q)
	}
	f.Fuzz(func(t *testing.T, raw string) {
		q, err := url.ParseQuery(raw)
		if err != nil {
			return
		}
		filter, req, err := regressionQuestion(q)
		if err != nil {
			if p := problemOf(err); p.Status != 400 || p.Detail == "" {
				t.Fatalf("%q: refused as %+v", raw, p)
			}
			return
		}
		again := withValues(regressionFilter(filter).Values(), regressionValues(req))
		filter2, req2, err := regressionQuestion(again)
		if err != nil {
			t.Fatalf("%q gives the address %q, which is refused: %v", raw, again.Encode(), err)
		}
		if !reflect.DeepEqual(req, req2) {
			t.Fatalf("%q: %+v, through its address %+v", raw, req, req2)
		}
		if !reflect.DeepEqual(regressionFilter(filter).Values(), regressionFilter(filter2).Values()) {
			t.Fatalf("%q: the filter changed on its way through the address", raw)
		}
	})
}

// FuzzTarget: any query is read or refused with its parameter; a target that
// is read is answered or refused, never a fault.
func FuzzTarget(f *testing.F) {
	for _, q := range []string{
		"palaeolatitude=28&age=70", "inclination=-50&a95=5&flattening=0.6&unit=Maastrichtian", "site_lat=12+S&site_lon=10W&pole_lat=72&pole_lon=200&a95=4&age=70&age_se=3",
		"site_lat=10&site_lon=20&plate=India&age=120", "site_lat=1&site_lon=2&euler_lat=3&euler_lon=4&euler_angle=-5&euler_error=1&euler_frame=mantle",
		"palaeolatitude=0&palaeolatitude_se=60", "palaeolatitude=90&day=given&days_per_year=400", "palaeolatitude=30&rotation_period_h=10&gravity_m_s2=3.7",
		"palaeolatitude=30&target_slope_deg=0.2&target_width_m=900&target_depth_m=60&radius_m=1500&speed_m_s=1&concentration=0.01&observed_sinuosity=1",
		"palaeolatitude=30&pole_csv=plate,age_ma,pole_lat,pole_lon%0aX,70,80,20", "palaeolatitude=1e308", "age=1e-300&palaeolatitude=5&day=constant_rate&rate_ms_per_century=2",
	} {
		f.Add(q)
	}
	fits, err := expectation.Fit(context.Background(), fuzzRows(), expectation.Options{Cluster: "parent_deposit", Seed: fitSeed, ClassLimits: expectation.Classes})
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, raw string) {
		q, err := url.ParseQuery(raw)
		if err != nil {
			return
		}
		target, err := targetOf(q)
		if err == nil {
			target.Draws = min(target.Draws, 200)
			_, err = fits.Expect(context.Background(), target)
		}
		if err != nil {
			if p := problemOf(err); p.Status != 400 || p.Detail == "" || p.Field == "" {
				t.Fatalf("%q: refused as %+v (%v)", raw, p, err)
			}
		}
	})
}

// fuzzRows are invented rows enough to fit.
func fuzzRows() []stats.Row {
	var rows []catalogue.Row
	for i := range 24 {
		r := catalogue.NewRow()
		r.System = "s" + string(rune('a'+i))
		r.ParentDeposit, r.Kind, r.SinuosityKind, r.MeasuredLine = "d"+string(rune('a'+i/2)), "submarine", "peak", "thalweg"
		r.LatitudeDeg, r.Sinuosity, r.ValleySlope = catalogue.Num(float64(3*i)), catalogue.Num(2.4-0.045*float64(i)+0.1*float64(i%3)), catalogue.Num(0.001+0.0003*float64(i%7))
		rows = append(rows, r)
	}
	return statsRows(rows, nil)
}

// FuzzTargetsFile: any file is answered row by row or refused as a table; what
// comes back is a table with as many rows.
func FuzzTargetsFile(f *testing.F) {
	for _, s := range []string{targetsFile, "", "palaeolatitude\n", "palaeolatitude\n\"", "palaeolatitude;age\n1;2", "\ufeffage,palaeolatitude\r\n1,2\r\n\r\n3", "palaeolatitude,x\n1,=cmd\n2,\"a\"\"b\"", "palaeolatitude\n\xff\n", "a,b\n1", "seed,palaeolatitude\n-1,2"} {
		f.Add(s)
	}
	refuse := func(context.Context, string, string) (*expectation.Fits, error) {
		return nil, &badInput{"response", "not asked in this test"}
	}
	f.Fuzz(func(t *testing.T, text string) {
		if strings.Count(text, "\n") > 2000 {
			return
		}
		var out bytes.Buffer
		n, err := answerTargets(context.Background(), strings.NewReader(text), &out, url.Values{}, refuse, batchWatch{})
		if err != nil {
			if out.Len() > 0 {
				t.Fatalf("%q: refused with %d bytes written: %v", text, out.Len(), err)
			}
			return
		}
		rows, err := csv.NewReader(&out).ReadAll()
		if err != nil || len(rows) != n.Rows+1 {
			t.Fatalf("%q: %d rows counted, %d written, %v", text, n.Rows, len(rows)-1, err)
		}
		for _, r := range rows[1:] {
			if len(r) != len(rows[0]) || r[len(r)-1] == "" {
				t.Fatalf("%q: row %q", text, r)
			}
		}
	})
}
