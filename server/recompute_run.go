package main

import (
	"cmp"
	"context"
	"encoding/json"
	"fmt"
	"log/slog"
	"math"
	"net/url"
	"slices"
	"strings"
	"sync"
	"time"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// recomputeParameters are the settings of a recomputation. What belongs to a
// line or its file (width, direction, coordinates) stays that of the line.
var recomputeParameters = []string{"window_bends", "window_widths", "window_m", "spacing_m", "along", "smooth", "min_bend_widths", "k"}

// recomputeSettings reads them; what is wrong comes back by parameter.
func recomputeSettings(q url.Values) (planform.Settings, map[string]string) {
	only := url.Values{}
	for _, name := range recomputeParameters {
		if v, ok := q[name]; ok {
			only[name] = v
		}
	}
	s, wrong := measureSettings(only)
	if s.K == 0 {
		s.K = planform.DefaultK
	}
	if s.WindowM == 0 && s.WindowWidths == 0 && s.WindowBends == 0 {
		// The default of one line depends on whether its width is known; here all
		// lines are to be measured alike.
		s.WindowWidths = planform.DefaultWindowWidths
	}
	return s, wrong
}

// recomputeSettingsText is what was asked for, as it would be typed.
func recomputeSettingsText(s planform.Settings) string {
	var parts []string
	for _, t := range settingTexts(s) {
		if t[1] != "0" && slices.Contains(recomputeParameters, t[0]) {
			parts = append(parts, t[0]+"="+t[1])
		}
	}
	return strings.Join(parts, ", ")
}

// settingsOf reads settings kept as JSON; those of another version may hold
// words no longer known, then the defaults stand in.
func settingsOf(text string) planform.Settings {
	var s planform.Settings
	if text != "" && json.Unmarshal([]byte(text), &s) != nil {
		return planform.Settings{}
	}
	return s
}

// measureAgain measures a stored line with the settings of a recomputation.
func measureAgain(l catalogue.LineToMeasure, s planform.Settings) (out catalogue.RecomputedLine) {
	out = catalogue.RecomputedLine{Line: l.ID, System: l.System, Measurement: l.Measured, Recorded: l.Recorded, RecordedKind: l.RecordedKind, Settings: "{}"}
	old := planform.Summarise(l.Sinuosities, s.K)
	out.OldWindows = old.Windows
	out.Old = catalogue.Levels{Mean: given64(old.Mean), P90: given64(old.P90), Peak: given64(old.Peak), Standardised: given64(old.Standardised)}
	level := map[string]*catalogue.Number{"reach": &out.Old.Reach, "mean": &out.Old.Mean, "p90": &out.Old.P90, "peak": &out.Old.Peak}[l.RecordedKind]
	if level != nil && !level.Valid {
		*level = l.Recorded
	}
	defer func() {
		if p := recover(); p != nil { // one line must not end the work on all others
			out.New, out.Sinuosities, out.Remark = catalogue.Levels{}, nil, fmt.Sprintf("Measuring it failed (%v); report this line.", p)
		}
	}()
	stored := settingsOf(l.Settings)
	s.Direction, s.Z = stored.Direction, "elevation"
	if s.WidthM = stored.WidthM; s.WidthM == 0 {
		s.WidthM = positive(l.WidthM)
	}
	lines, refused, err := planform.Read([]byte(l.Line), "application/geo+json", "", planform.Settings{Z: "elevation"})
	switch {
	case err != nil:
		out.Remark = inputSentence(err)
		return out
	case len(lines) != 1 && len(refused) > 0:
		out.Remark = sentence(refused[0].Reason, "")
		return out
	case len(lines) != 1:
		out.Remark = "What is stored is not one line."
		return out
	}
	m, err := planform.Measure(lines[0], s)
	if err != nil {
		out.Remark = inputSentence(err)
		return out
	}
	takeMeasured(&out, m)
	return out
}

func takeMeasured(out *catalogue.RecomputedLine, m *planform.Measured) {
	out.New = catalogue.Levels{Reach: given64(m.ReachSinuosity), Mean: given64(m.MeanSinuosity), P90: given64(m.P90Sinuosity), Peak: given64(m.PeakSinuosity)}
	if p := m.StandardisedPeak; p != nil {
		out.New.Standardised = given64(p.Expected)
	}
	out.Low, out.High, out.WindowM = given64(m.Sensitivity.Low), given64(m.Sensitivity.High), given64(m.WindowLengthM)
	for _, w := range m.Windows {
		if isFinite(w.Sinuosity) && w.Sinuosity >= 1 {
			out.Sinuosities = append(out.Sinuosities, w.Sinuosity)
		}
	}
	if b, err := json.Marshal(finite(m.Settings)); err == nil {
		out.Settings = string(b)
	}
	var remarks []string
	if !out.New.Reach.Valid {
		remarks = append(remarks, "The line is closed: it has no sinuosity of the reach.")
	}
	if m.WholeReach {
		remarks = append(remarks, "The line is shorter than one window: the whole of it is the window.")
	}
	if m.Coarse {
		remarks = append(remarks, "The line is too coarse for its bends: its sinuosity reads low.")
	}
	out.Remark = strings.Join(remarks, " ")
}

// recomputer runs recomputations, one at a time, beside the requests. What it
// has to do and how far it has come stands in the catalogue, so that a stop of
// the program loses nothing.
type recomputer struct {
	store *catalogue.Store
	log   *slog.Logger
	ctx   context.Context
	stop  context.CancelFunc
	turn  chan struct{}
	wg    sync.WaitGroup

	mu      sync.Mutex
	running map[string]context.CancelFunc
}

func newRecomputer(store *catalogue.Store, log *slog.Logger) *recomputer {
	ctx, stop := context.WithCancel(context.Background())
	return &recomputer{store: store, log: log, ctx: ctx, stop: stop, turn: make(chan struct{}, 1), running: map[string]context.CancelFunc{}}
}

// resume lets every recomputation run on that a stop of the program left
// unfinished.
func (r *recomputer) resume() {
	if r.store.ReadOnly() {
		return
	}
	list, err := r.store.Recomputations(r.ctx)
	if err != nil {
		r.log.Error("unfinished recomputations could not be looked up", "err", err)
		return
	}
	for i := range list {
		if one := &list[len(list)-1-i]; one.State == "running" {
			r.run(one.Name)
		}
	}
}

// halt stops all of them where they are and waits for that.
func (r *recomputer) halt() {
	r.stop()
	r.wg.Wait()
}

// run takes one up unless it is running already.
func (r *recomputer) run(name string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if r.running[name] != nil || r.ctx.Err() != nil {
		return
	}
	ctx, cancel := context.WithCancel(r.ctx)
	r.running[name] = cancel
	r.wg.Go(func() {
		defer r.forget(name)
		defer cancel()
		select {
		case r.turn <- struct{}{}:
			defer func() { <-r.turn }()
		case <-ctx.Done():
			return
		}
		if err := r.work(ctx, name); err != nil && ctx.Err() == nil {
			r.log.Error("a recomputation stopped; it goes on when it is resumed or at the next start", "recomputation", name, "err", err)
		}
	})
}

func (r *recomputer) forget(name string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	delete(r.running, name)
}

// has says whether this program is running it.
func (r *recomputer) has(name string) bool {
	r.mu.Lock()
	defer r.mu.Unlock()
	return r.running[name] != nil
}

// end stops one at once, if it runs here.
func (r *recomputer) end(name string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if cancel := r.running[name]; cancel != nil {
		cancel()
	}
}

func (r *recomputer) work(ctx context.Context, name string) error {
	_, err := recompute(ctx, r.store, name, nil)
	return err
}

// keepEvery is how often what was measured is stored: what a crash can lose.
const keepEvery = 300 * time.Millisecond

// recompute measures the lines a recomputation has not reached, and stores
// what they give as it goes. It ends when all are reached, when someone
// cancelled it, or with ctx. progress may be nil; it is told the lines reached
// and all lines.
func recompute(ctx context.Context, store *catalogue.Store, name string, progress func(reached, lines int)) (state string, err error) {
	rc, err := store.Recomputation(ctx, name)
	if err != nil {
		return "", err
	}
	s := settingsOf(rc.Settings)
	var held []catalogue.RecomputedLine
	kept := time.Now()
	keep := func() error {
		// Work that is done is stored although the program is told to stop.
		state, err = store.KeepRecomputed(context.WithoutCancel(ctx), name, held)
		rc.Reached += len(held)
		held, kept = held[:0], time.Now()
		if err == nil && progress != nil {
			progress(min(rc.Reached, rc.Lines), rc.Lines)
		}
		return err
	}
	after, reached := int64(0), 0
	for {
		lines, err := store.LinesToMeasure(ctx, name, after, 64)
		if err != nil {
			return state, err
		}
		for _, l := range lines {
			if ctx.Err() != nil {
				return state, cmp.Or(keep(), ctx.Err())
			}
			held, after = append(held, measureAgain(l, s)), l.ID
			reached++
			if time.Since(kept) > keepEvery {
				if err := keep(); err != nil || state != "running" {
					return state, err
				}
			}
		}
		if len(lines) > 0 {
			continue
		}
		if err := keep(); err != nil || state != "running" || reached == 0 {
			return state, err
		}
		after, reached = 0, 0 // lines another program had taken up and left
	}
}

// difference of two numbers, NaN unless both are given.
func difference(now, then catalogue.Number) float64 {
	if !now.Valid || !then.Valid {
		return math.NaN()
	}
	return now.V - then.V
}

func given64(v float64) catalogue.Number {
	if !isFinite(v) {
		return catalogue.Number{}
	}
	return catalogue.Num(v)
}
