package catalogue

import (
	"context"
	"fmt"
	"path/filepath"
	"testing"
)

var ctx = context.Background()

// open makes a new catalogue in a temporary folder.
func open(t testing.TB) *Store {
	t.Helper()
	s, err := Open(ctx, filepath.Join(t.TempDir(), "catalogue.db"), Options{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := s.Close(); err != nil {
			t.Error(err)
		}
	})
	return s
}

// row is a valid row of an invented system.
func row(name string, lat, lon, sinuosity float64) Row {
	r := NewRow()
	r.SystemName = name
	r.LatitudeDeg, r.LongitudeDeg, r.Sinuosity = Num(lat), Num(lon), Num(sinuosity)
	r.SinuosityKind, r.MeasuredLine = "peak", "thalweg"
	r.Source = "Invented Survey Reports 1:1 (2020)"
	return r
}

func insert(t testing.TB, s *Store, rows ...Row) []Row {
	t.Helper()
	if err := s.InsertRows(ctx, rows, nil, 0, "test"); err != nil {
		t.Fatal(err)
	}
	return rows
}

// many makes n systems with two measurements each.
func many(n int) []Row {
	rows := make([]Row, 0, 2*n)
	for i := range n {
		name := fmt.Sprintf("Invented %05d", i)
		for j := range 2 {
			r := row(name, float64(i%140)-70+0.013, float64(i*7%360)-180+0.5, 1+float64(i%37)/20+float64(j)/10)
			r.ParentDeposit = fmt.Sprintf("Deposit %04d", i/3)
			r.Basin = "Invented Basin"
			r.Feeder = []string{"river", "shelf", "glacial"}[i%3]
			r.Grain = []string{"mud", "sand"}[i%2]
			r.Setting = []string{"fan", "slope", "rise", "trench"}[i%4]
			r.Grade = []string{"quoted", "surveyed"}[j]
			r.ValleySlope = Num(0.001 + float64(i%50)/5000)
			r.ChannelWidthM, r.ChannelDepthM = Num(100+float64(i%700)), Num(20+float64(i%60))
			r.WavelengthM, r.AmplitudeM = Num(2000), Num(800)
			r.Reach = []string{"upper", "lower"}[j]
			rows = append(rows, r)
		}
	}
	return rows
}
