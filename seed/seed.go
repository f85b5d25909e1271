// Package seed holds the invented demo catalogue, the law it is drawn from and
// the generator.
//
// The demo is a world ocean survey that never took place: 70 submarine systems
// in 30 parent deposits (three of them systems that stand alone) over all
// oceans and latitudes, ten of the systems ancient, and twelve rivers as a
// control group. Places are real water (rivers: real land), so that maps look
// right; names of channels, deposits, basins, people, papers and journals are
// coined, DOIs use the test prefix 10.5555, and every row starts its notes with
// catalogue.InventedMark.
//
// It is drawn from a law (law.go) that is known exactly, in four versions, so
// that what a regression finds can be compared with what is true. In places
// and supply the four versions are the same: feeders and grain change with
// latitude as they do in nature (ice fed poleward, large muddy rivers nearer
// the equator), so that f and supply are confounded whichever of them acts.
//
// It is made to look like data: mixed lines, kinds, surveys and grades, gaps,
// one system with far more rows than any other, older values traced from
// figures, values quoted in a census with the method unknown, and a few
// doubtful records that the checks of the catalogue should catch (doubtful.go).
// Every system has a centreline whose windows give back its record.
//
// The demo catalogue is dedicated to the public domain: see LICENSE-CC0.txt.
package seed

import (
	"context"

	"fathombend/catalogue"
)

// Survey is the demo as it goes into a store. Rows carry their measurement ids
// and slugs already; centrelines name the row they were measured for.
type Survey struct {
	Rows        []catalogue.Row
	Centrelines []catalogue.Centreline
	Doubtful    []Doubt
	// Expected is, for each row, the ln(P - 1) of the law without any scatter;
	// NaN for rivers, bends, the whole-channel peak and values quoted in the
	// census, which are not drawn from it.
	Expected []float64
}

// Doubt is a record that was spoilt on purpose.
type Doubt struct {
	Row    int // index into Rows
	Column string
	What   string
}

// DefaultSeed draws the demo that `serve` shows.
const DefaultSeed = 2

// Why is what the history of every demo record says.
const Why = "Invented demo catalogue"

// Fill writes the demo catalogue into an empty store.
func Fill(ctx context.Context, s *catalogue.Store, law Law) error {
	survey, err := Generate(law)
	if err != nil {
		return err
	}
	return s.InsertRows(ctx, survey.Rows, survey.Centrelines, 0, Why)
}

// Generate draws the demo from a law. Equal laws give equal surveys.
func Generate(law Law) (Survey, error) {
	return Draw(Options{Law: law, Seed: DefaultSeed, Centrelines: true})
}

// Options of Draw.
type Options struct {
	Law  Law
	Seed uint64 // of the scatter; places, supply, slopes and sizes are always the same
	// Centrelines are the larger part of the work; coverage studies that draw
	// a thousand catalogues leave them out, and with them bends and the
	// whole-channel peak, which are read off a line.
	Centrelines bool
	Clean       bool // leave out the spoilt records
}

// Draw draws a survey.
func Draw(o Options) (Survey, error) {
	c, err := ConstantsOf(o.Law)
	if err != nil {
		return Survey{}, err
	}
	d := drawer{Options: o, law: c}
	for i := range deposits {
		d.deposit(i)
	}
	for i := range rivers {
		d.river(i)
	}
	if !o.Clean {
		d.spoil()
	}
	return d.survey, nil
}
