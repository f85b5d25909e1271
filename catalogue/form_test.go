package catalogue

import (
	"math"
	"testing"
)

func TestReadCells(t *testing.T) {
	r := NewRow()
	problems, conversions := ReadCells(&r, map[string]string{
		"system_name": "Harrow Deep Channel", "latitude_deg": "12 30 S", "longitude_deg": "40.25",
		"valley_slope_deg": "0.3", "channel_width_km": "1.234", "channel_slope_ratio": "1:200",
		"sinuosity": "1,6", "windows": "2.5", "nonsense": "x",
	})
	// 0.3 degrees: tan(0.3 pi / 180) = 0.00523604, worked by hand.
	if want := math.Tan(0.3 * math.Pi / 180); math.Abs(r.ValleySlope.V-want) > 1e-12 {
		t.Errorf("slope %g, want %g", r.ValleySlope.V, want)
	}
	if r.LatitudeDeg.V != -12.5 || r.ChannelWidthM.V != 1234 || r.ChannelSlope.V != 0.005 {
		t.Errorf("latitude %g, width %g, channel slope %g", r.LatitudeDeg.V, r.ChannelWidthM.V, r.ChannelSlope.V)
	}
	if len(conversions) != 4 {
		t.Errorf("%d conversions, want 4: %+v", len(conversions), conversions)
	}
	columns := map[string]bool{}
	for _, p := range problems {
		columns[p.Column] = true
	}
	if len(problems) != 2 || !columns["sinuosity"] || !columns["windows"] {
		t.Errorf("problems: %+v", problems)
	}
	if r.Sinuosity.Valid {
		t.Error("a refused cell changed the row")
	}
}

func TestCellUnits(t *testing.T) {
	slope, _ := ColumnByName("valley_slope")
	units := slope.CellUnits()
	if len(units) != 5 || units[0] != (CellUnit{"valley_slope", "m/m"}) {
		t.Fatalf("units of slope: %v", units)
	}
	for _, u := range units {
		r := NewRow()
		if problems, _ := ReadCells(&r, map[string]string{u.Name: "1"}); len(problems) > 0 || !r.ValleySlope.Valid {
			t.Errorf("%s is not read: %v", u.Name, problems)
		}
	}
	name, _ := ColumnByName("system_name")
	if len(name.CellUnits()) != 1 {
		t.Errorf("units of a name: %v", name.CellUnits())
	}
}
