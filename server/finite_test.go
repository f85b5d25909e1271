package main

import (
	"encoding/json"
	"math"
	"testing"
)

type innerForm struct {
	Slug string `json:"slug"`
}

// The members of an embedded struct that is not exported itself are written,
// as encoding/json writes them, and what is not finite is null.
func TestFiniteKeepsEmbeddedMembers(t *testing.T) {
	v := struct {
		innerForm
		X []float64 `json:"x"`
	}{innerForm{"a-channel"}, []float64{1, math.NaN(), math.Inf(1)}}
	b, err := json.Marshal(finite(v))
	if err != nil {
		t.Fatal(err)
	}
	if got, want := string(b), `{"slug":"a-channel","x":[1,null,null]}`; got != want {
		t.Errorf("got %s, want %s", got, want)
	}
}
