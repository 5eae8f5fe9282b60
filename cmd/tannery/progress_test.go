package main

import (
	"strings"
	"testing"
	"time"
)

func TestProgressOffATerminal(t *testing.T) {
	var b strings.Builder
	p := newProgress(&b, false)
	p.update("check degrees", 0.1, "best gap 0.2000 dB")
	if b.Len() > 0 {
		t.Errorf("a line at once: %q", b.String())
	}
	p.shown = p.shown.Add(-plainInterval)
	p.start = time.Now().Add(-10 * time.Second)
	p.update("check degrees", 0.25, "best gap 0.1000 dB")
	p.update("check degrees", 0.26, "best gap 0.0900 dB")
	p.finish()
	if want := "tannery: check degrees, best gap 0.1000 dB, 30s left\n"; b.String() != want {
		t.Errorf("%q, want %q", b.String(), want)
	}
}

func TestHiddenProgressIsSilent(t *testing.T) {
	var b strings.Builder
	p := newProgress(&b, true)
	p.update("check degrees", 0.5, "")
	p.finish()
	if p != nil || b.Len() > 0 {
		t.Errorf("%q", b.String())
	}
}

func TestRemaining(t *testing.T) {
	for _, c := range []struct {
		elapsed time.Duration
		done    float64
		want    string
	}{
		{500 * time.Millisecond, 0.5, ""},
		{10 * time.Second, 0, ""},
		{10 * time.Second, 1, ""},
		{10 * time.Second, 0.5, "10s left"},
		{time.Minute, 0.25, "3m0s left"},
	} {
		if got := remaining(c.elapsed, c.done); got != c.want {
			t.Errorf("%v, %v: %q, want %q", c.elapsed, c.done, got, c.want)
		}
	}
}

func TestLabelLeavesRoomForTheBar(t *testing.T) {
	for _, phase := range []string{"mean", strings.Repeat("λ and ρ ", 20)} {
		for _, left := range []string{"", "10h20m30s left"} {
			got := label(phase, "best gap 0.00002 in ε", left)
			if n := len([]rune(got)); n > textWidth || !strings.HasSuffix(got, left) || !strings.Contains(got, "best gap") {
				t.Errorf("%d columns: %q", n, got)
			}
		}
	}
}
