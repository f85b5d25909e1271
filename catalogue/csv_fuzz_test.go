package catalogue

import (
	"bytes"
	"encoding/csv"
	"testing"
)

func FuzzImport(f *testing.F) {
	addFiles(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		s, err := Open(ctx, t.TempDir()+"/f.db", Options{Throwaway: true})
		if err != nil {
			t.Fatal(err)
		}
		defer s.Close()
		rep, err := s.Import(ctx, bytes.NewReader(data), ImportOptions{Publish: true})
		if err != nil {
			t.Fatal(err)
		}
		if !rep.Stored && len(rep.Problems) == 0 {
			t.Fatal("not stored and no word why")
		}
		if !rep.Stored {
			return
		}
		// What was stored goes out and in again without a change.
		var out bytes.Buffer
		n, err := s.Export(ctx, &out, Filter{})
		if err != nil || n != rep.New {
			t.Fatal(n, rep.New, err)
		}
		again, err := s.Import(ctx, &out, ImportOptions{Publish: true})
		if err != nil || again.Identical != n || again.New+again.Changed != 0 {
			t.Fatalf("%+v %v", again, err)
		}
	})
}

func addFiles(f *testing.F) {
	f.Add([]byte(head + "\nA,10,20,1.5,peak,thalweg,S\n"))
	f.Add([]byte("\ufeff" + head + ",valley_slope_ratio,age_ka\r\nA,12 30 S,20,1.5,peak,thalweg,\"S, \"\"x\"\"\",1:20,3\r\n"))
	f.Add([]byte("measurement,system,notes\nm000001,a,'=1\n"))
	f.Add([]byte("a;b;c;d\n1,5;2\n"))
	f.Add([]byte(head + "\n\"A\n,10"))
	f.Add([]byte(head + ",channel_width_km,valley_slope_deg\nA,1e1,-0,1.5,peak,thalweg,'=S,1.25e-1,0.3\n"))
}

// FuzzReadRows is the reading part alone, without a catalogue: many more files
// a second. A row without a hard finding is written and read the same.
func FuzzReadRows(f *testing.F) {
	addFiles(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		cr := csv.NewReader(bytes.NewReader(data))
		cr.FieldsPerRecord = -1
		header, err := cr.Read()
		if err != nil {
			return
		}
		l, problems := readHeader(header)
		if len(problems) > 0 {
			return
		}
		whole, _ := readHeader(ColumnNames())
		for {
			record, err := cr.Read()
			if err != nil {
				return
			}
			if len(record) != len(l.cells) {
				continue
			}
			var r Row
			bad := false
			l.fill(&r, record, func(kind noteKind, cell int, p RowProblem) { bad = bad || kind == noteProblem })
			r.Normalise()
			if bad || hardError(CheckRow(&r, nil)) != nil {
				continue
			}
			out := make([]string, len(Columns))
			Record(&r, out)
			var again Row
			whole.fill(&again, out, func(_ noteKind, cell int, p RowProblem) { t.Fatalf("%s: %+v", Columns[cell].Name, p) })
			again.Normalise()
			if d := Diff(&r, &again); len(d) > 0 {
				t.Fatalf("%v", d)
			}
		}
	})
}
