package main

import (
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"time"
	"unicode/utf8"

	"github.com/schollz/progressbar/v3"

	"tannery/cmd/tannery/internal/report"
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
	limit time.Duration            // after which the search stops; 0 for none
	start time.Time
	shown time.Time // when the last plain line was written

	// Where a search begins that continues an earlier one.
	begun       bool
	done        float64
	evaluations int
}

// newProgress returns nil if nothing is to be shown.
func newProgress(w io.Writer, hidden bool, limit time.Duration) *progress {
	if hidden {
		return nil
	}
	p := &progress{w: w, limit: limit, start: time.Now(), shown: time.Now()}
	if isTerminal(w) && os.Getenv("TERM") != "dumb" {
		p.bar = progressbar.NewOptions(barSteps,
			progressbar.OptionSetWriter(w),
			progressbar.OptionSetWidth(8),
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
const textWidth = 62

// label joins what is known into one line.
func label(parts ...string) string {
	parts = slices.DeleteFunc(parts, func(part string) bool { return part == "" })
	return strings.Join(parts, ", ")
}

// shortened leaves out the end of a phase where the line would be too long for
// the bar beside it.
func shortened(phase string, rest ...string) string {
	room := textWidth - utf8.RuneCountInString(label(append([]string{""}, rest...)...)) - len(", ")
	if utf8.RuneCountInString(phase) > room {
		return string([]rune(phase)[:max(0, room-1)]) + "…"
	}
	return phase
}

// update shows the phase, how much of the work is done (from 0 to 1), the best
// so far in words, and the evaluations made.
func (p *progress) update(phase string, done float64, best string, evaluations int) {
	if p == nil {
		return
	}
	if !p.begun {
		p.begun, p.done, p.evaluations = true, done, evaluations
	}
	elapsed := time.Since(p.start)
	left := remaining(elapsed, p.done, done, p.limit)
	switch {
	case p.bar != nil:
		rate := perSecond(evaluations-p.evaluations, elapsed, "/s")
		p.bar.Describe(label(shortened(phase, best, rate, left), best, rate, left))
		// One step is left out so that the bar does not finish by itself.
		_ = p.bar.Set(int(done * (barSteps - 1)))
	case time.Since(p.shown) >= plainInterval:
		p.shown = time.Now()
		fmt.Fprintf(p.w, "tannery: %s\n", label(phase, best, perSecond(evaluations-p.evaluations, elapsed, " evaluations per second"), left))
	}
}

// perSecond is the speed in evaluations; nothing before there is something to
// go by.
func perSecond(evaluations int, elapsed time.Duration, unit string) string {
	if evaluations <= 0 || elapsed < time.Second {
		return ""
	}
	return report.Significant(float64(evaluations)/elapsed.Seconds(), 2) + unit
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

// remaining estimates the time left in whole seconds, from the share of the
// work that was done at the start and is done now, and from the time allowed;
// nothing before there is something to go by.
func remaining(elapsed time.Duration, before, done float64, limit time.Duration) string {
	if done-before < 0.01 || done >= 1 || elapsed < time.Second {
		return ""
	}
	left := time.Duration(float64(elapsed) * (1 - done) / (done - before))
	if limit > 0 {
		left = max(0, min(left, limit-elapsed))
	}
	return left.Round(time.Second).String() + " left"
}
