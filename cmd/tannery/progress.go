package main

import (
	"fmt"
	"io"
	"os"
	"time"
	"unicode/utf8"

	"github.com/schollz/progressbar/v3"
)

// plainInterval is the time between two lines of progress where there is no
// terminal: often enough to see life, seldom enough for a log.
const plainInterval = 5 * time.Second

// barSteps is the resolution of the bar.
const barSteps = 1000

// progress shows on standard error how far a search is: a bar at a terminal,
// a plain line every few seconds otherwise. It is not safe for concurrent
// use.
type progress struct {
	w     io.Writer
	bar   *progressbar.ProgressBar // nil without a terminal
	start time.Time
	shown time.Time // when the last plain line was written
}

// newProgress returns nil if nothing is to be shown.
func newProgress(w io.Writer, hidden bool) *progress {
	if hidden {
		return nil
	}
	p := &progress{w: w, start: time.Now(), shown: time.Now()}
	if isTerminal(w) && os.Getenv("TERM") != "dumb" {
		p.bar = progressbar.NewOptions(barSteps,
			progressbar.OptionSetWriter(w),
			progressbar.OptionSetWidth(14),
			progressbar.OptionSetPredictTime(false),
			progressbar.OptionSetElapsedTime(false),
			progressbar.OptionThrottle(100*time.Millisecond),
			progressbar.OptionClearOnFinish(),
			progressbar.OptionUseANSICodes(true),
			progressbar.OptionSetTheme(progressbar.Theme{Saucer: "=", SaucerHead: ">", SaucerPadding: " ", BarStart: "[", BarEnd: "]"}),
		)
	}
	return p
}

// isTerminal tells whether w is a character device, as terminals are.
func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	if !ok {
		return false
	}
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}

// textWidth is the room that the bar leaves on a line of 80 columns.
const textWidth = 56

// label joins what is known into one line, and shortens the phase where the
// line would be too long for the bar beside it.
func label(phase, best, left string) string {
	rest := ""
	for _, part := range []string{best, left} {
		if part != "" {
			rest += ", " + part
		}
	}
	if room := textWidth - utf8.RuneCountInString(rest); utf8.RuneCountInString(phase) > room {
		phase = string([]rune(phase)[:max(0, room-1)]) + "…"
	}
	return phase + rest
}

// update shows the phase, how much of the work is done (from 0 to 1) and the
// best so far in words.
func (p *progress) update(phase string, done float64, best string) {
	if p == nil {
		return
	}
	text := label(phase, best, remaining(time.Since(p.start), done))
	switch {
	case p.bar != nil:
		p.bar.Describe(text)
		// One step is left out so that the bar does not finish by itself.
		_ = p.bar.Set(int(done * (barSteps - 1)))
	case time.Since(p.shown) >= plainInterval:
		p.shown = time.Now()
		fmt.Fprintf(p.w, "tannery: %s\n", text)
	}
}

// ending tells a person who has interrupted the search that it was heard: the
// evaluation under way may take some seconds more.
func (p *progress) ending() {
	if p != nil && p.bar != nil {
		fmt.Fprint(p.w, "\r\x1b[Ktannery: ending with the best found; interrupt again to end at once\n")
	}
}

// finish removes the bar, so that what follows stands on a clean line.
func (p *progress) finish() {
	if p != nil && p.bar != nil {
		_ = p.bar.Finish()
	}
}

// remaining estimates the time left from the share of the work done, in
// whole seconds; nothing before there is something to go by.
func remaining(elapsed time.Duration, done float64) string {
	if done < 0.01 || done >= 1 || elapsed < time.Second {
		return ""
	}
	left := time.Duration(float64(elapsed) * (1 - done) / done).Round(time.Second)
	return left.String() + " left"
}
