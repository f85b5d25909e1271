package catalogue

import (
	"testing"
	"time"
)

// BenchmarkSynchronous is the cost of waiting for the disk at every commit
// (FULL, what a catalogue is opened with) against waiting at checkpoints only
// (NORMAL) and never (OFF).
func BenchmarkSynchronous(b *testing.B) {
	for _, mode := range []string{"FULL", "NORMAL", "OFF"} {
		b.Run(mode, func(b *testing.B) {
			s := open(b)
			if _, err := s.w.Exec(`PRAGMA synchronous = ` + mode); err != nil {
				b.Fatal(err)
			}
			expiry := time.Now().Add(time.Hour)
			for b.Loop() {
				if err := s.SessionCommit(ctx, "token", []byte("data"), expiry); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
