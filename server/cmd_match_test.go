package main

import (
	"path/filepath"
	"strings"
	"testing"
)

func TestImportMatches(t *testing.T) {
	file := filepath.Join(t.TempDir(), "c.db")
	other := tempFile(t, "other.csv", "Channel;Lat;Long;Sinuosity;Statistic;Line;Reference;Slope (deg);Breadth\n"+
		"Loom;-30,5;-20;1,4;peak;thalweg;Invented 2031;0,5;2,4\nBad;-30,5;-20;0,4;peak;thalweg;Invented 2031;0,5;2,4\n")
	try := func(stdin string, args ...string) (int, string) {
		code, out, errOut := runCommand(stdin, append([]string{"import", "-catalogue", file}, args...)...)
		return code, out + errOut
	}
	if code, said := try("", other); code != exitProblem || !strings.Contains(said, "semicolons") {
		t.Errorf("without -match: exit %d\n%s", code, said)
	}
	if code, said := try("", "-match", other); code != exitProblem || !strings.Contains(said, "below 1") || !strings.Contains(said, "nothing stored") {
		t.Errorf("one row is refused: exit %d\n%s", code, said)
	}
	code, said := try("", "-match", "-partial", "-publish", "-as", "Breadth=channel_width_km", other)
	for _, want := range []string{"Slope (deg), is read as valley_slope_deg", "Breadth, is read as channel_width_km", "1 new", "1 refused"} {
		if !strings.Contains(said, want) {
			t.Errorf("does not say %q", want)
		}
	}
	if code != exitOK {
		t.Errorf("exit %d\n%s", code, said)
	}
	// tan(0.5 degrees), by hand.
	if table := mustRun(t, "", "export", "-catalogue", file); !strings.Contains(table, ",2400,") || !strings.Contains(table, "0.00872686779") || !strings.Contains(table, ",-30.5,") {
		t.Errorf("the table:\n%s", table)
	}
	doubtful := "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,channel_width_m\nWeft,1,2,1.5,peak,thalweg,Invented 2031,\"1,200\"\n"
	if code, said := try(doubtful, "-match", "-"); code != exitProblem || !strings.Contains(said, "-numbers") {
		t.Errorf("two readings: exit %d\n%s", code, said)
	}
	if code, said := try(doubtful, "-match", "-numbers", "point_groups", "-publish", "-"); code != exitOK {
		t.Errorf("exit %d\n%s", code, said)
	} else if table := mustRun(t, "", "export", "-catalogue", file); !strings.Contains(table, ",1200,") {
		t.Errorf("the table:\n%s", table)
	}
	if code, said := try(strings.ReplaceAll(doubtful, "Weft", "L\xf6om"), "-match", "-numbers", "point_groups", "-"); code != exitProblem || !strings.Contains(said, "-encoding") {
		t.Errorf("Latin-1: exit %d\n%s", code, said)
	}
	for _, args := range [][]string{{"-encoding", "utf-8", other}, {"-match", "-numbers", "roman", other}, {"-match", "-as", "Breadth", other}, {"-match", "-as", "Breadth=girth", other}} {
		if code, said := try("", args...); code != exitBadCall {
			t.Errorf("%v: exit %d\n%s", args, code, said)
		}
	}
	if code, _ := try("", "-match", "-as", "Girth=channel_width_m", other); code != exitProblem {
		t.Error("a header that is not there is taken")
	}
}

// What people type into number fields gets a reply that helps.
func TestNumbersTypedOtherwise(t *testing.T) {
	v := newDemoSite(t).visitor()
	for typed, want := range map[string]string{"1,200": "two ways", "70 m": "holds its unit; write 70 alone", "3 %2B- 6": "a value and its error", "28,5": "28.5", "3-5": "is a range"} {
		v.get("/systems?width_min=" + strings.ReplaceAll(typed, " ", "%20")).is(400).says(want)
		v.get("/regression?model=linear:coriolis&seed=1&level=" + strings.ReplaceAll(typed, " ", "%20")).is(400).says(want)
	}
}
