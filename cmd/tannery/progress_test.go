package main

import (
	"strings"
	"testing"
	"time"
)

func TestProgressOffATerminal(t *testing.T) {
	var b strings.Builder
	p := newProgress(&b, false, 0)
	p.update("check degrees", 0, "σ 0.90000 (gap 0.2000 dB)", 100)
	if b.Len() > 0 {
		t.Errorf("a line at once: %q", b.String())
	}
	p.shown = p.shown.Add(-plainInterval)
	p.start = time.Now().Add(-10 * time.Second)
	p.update("check degrees", 0.25, "σ 0.91000 (gap 0.1000 dB)", 600)
	p.update("check degrees", 0.26, "σ 0.92000 (gap 0.0900 dB)", 700)
	p.finish()
	if want := "tannery: check degrees, σ 0.91000 (gap 0.1000 dB), 50 evaluations per second, 30s left\n"; b.String() != want {
		t.Errorf("%q, want %q", b.String(), want)
	}
}

func TestHiddenProgressIsSilent(t *testing.T) {
	var b strings.Builder
	p := newProgress(&b, true, 0)
	p.update("check degrees", 0.5, "", 7)
	p.finish()
	if p != nil || b.Len() > 0 {
		t.Errorf("%q", b.String())
	}
}

// A search that continues counts only what is left to do.
func TestRemaining(t *testing.T) {
	for _, c := range []struct {
		elapsed      time.Duration
		before, done float64
		limit        time.Duration
		want         string
	}{
		{500 * time.Millisecond, 0, 0.5, 0, ""},
		{10 * time.Second, 0, 0, 0, ""},
		{10 * time.Second, 0, 1, 0, ""},
		{10 * time.Second, 0, 0.5, 0, "10s left"},
		{time.Minute, 0, 0.25, 0, "3m0s left"},
		{time.Minute, 0.5, 0.75, 0, "1m0s left"},
		{time.Minute, 0, 0.25, 90 * time.Second, "30s left"},
		{time.Minute, 0, 0.25, 59 * time.Second, "0s left"},
	} {
		if got := remaining(c.elapsed, c.before, c.done, c.limit); got != c.want {
			t.Errorf("%v: %q, want %q", c, got, c.want)
		}
	}
}

func TestLabelLeavesRoomForTheBar(t *testing.T) {
	for _, phase := range []string{"mean", strings.Repeat("λ and ρ ", 20)} {
		for _, left := range []string{"", "10h20m30s left"} {
			const best = "σ 0.97123 (gap 0.0612 dB)"
			got := label(shortened(phase, best, left), best, left)
			if n := len([]rune(got)); n > textWidth || !strings.HasSuffix(got, left) || !strings.Contains(got, best) {
				t.Errorf("%d columns: %q", n, got)
			}
		}
	}
}
