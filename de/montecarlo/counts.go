package montecarlo

import "fmt"

// Counts are the sums over a number of trials, from trial 0 on without gaps.
type Counts struct {
	Frames          int64 `json:"frames"`
	FrameErrors     int64 `json:"frame_errors"`
	Undetected      int64 `json:"undetected_errors"` // frame errors at which the decoder stopped at another codeword
	BitErrors       int64 `json:"bit_errors"`
	BitErrorSquares int64 `json:"bit_error_squares"` // sum of the squares of the bit errors of each frame
	Iterations      int64 `json:"iterations"`
}

func (c *Counts) add(o outcome) {
	c.Frames++
	c.BitErrors += o.bitErrors
	c.BitErrorSquares += o.bitErrors * o.bitErrors
	c.Iterations += o.iterations
	if o.bitErrors > 0 {
		c.FrameErrors++
	}
	if o.undetected {
		c.Undetected++
	}
}

// mostFrames is more than anybody measures, and keeps sums far from overflow.
const mostFrames = 1 << 50

// check returns an error unless trials of that length can give these counts.
func (c Counts) check(length int) error {
	n := int64(length)
	switch {
	case c.Frames > mostFrames:
		return fmt.Errorf("frames %d: must be at most %d", c.Frames, int64(mostFrames))
	case c.Frames < 0 || c.FrameErrors < 0 || c.FrameErrors > c.Frames:
		return fmt.Errorf("frame_errors %d of %d frames: must be from 0 to the number of frames", c.FrameErrors, c.Frames)
	case c.Undetected < 0 || c.Undetected > c.FrameErrors:
		return fmt.Errorf("undetected_errors %d: must be from 0 to the %d frame errors", c.Undetected, c.FrameErrors)
	case c.BitErrors < c.FrameErrors || float64(c.BitErrors) > float64(c.FrameErrors)*float64(n):
		return fmt.Errorf("bit_errors %d in %d erroneous frames: must be from 1 to %d in each", c.BitErrors, c.FrameErrors, n)
	case c.BitErrorSquares < c.BitErrors || float64(c.BitErrorSquares) > float64(c.BitErrors)*float64(n):
		return fmt.Errorf("bit_error_squares %d: must be from 1 to %d times the %d bit errors", c.BitErrorSquares, n, c.BitErrors)
	case c.Iterations < 0 || c.Iterations > 0 && c.Frames == 0:
		return fmt.Errorf("iterations %d of %d frames: must not be negative, and 0 without frames", c.Iterations, c.Frames)
	}
	return nil
}

// Measurement is what has been measured at one channel parameter, and how;
// written as JSON and read back it is the state from which Run continues.
type Measurement struct {
	Channel    string   `json:"channel"`
	Parameter  float64  `json:"parameter"`
	Seed       uint64   `json:"seed"`
	Iterations int      `json:"max_iterations"` // 0: no limit
	Schedule   Schedule `json:"schedule,omitempty"`
	Matrix     string   `json:"matrix"` // Digest of the graph
	Length     int      `json:"length"`
	Counts     Counts   `json:"counts"`
}

// MeanIterations returns the iterations per frame, 0 before the first.
func (m Measurement) MeanIterations() float64 {
	if m.Counts.Frames == 0 {
		return 0
	}
	return float64(m.Counts.Iterations) / float64(m.Counts.Frames)
}

// FrameErrorRate returns the fraction of frames in error with the exact
// binomial confidence interval (Clopper & Pearson, Biometrika 26(4), 1934);
// confidence lies between 0 and 1, as in 0.95. After a stop at a number of
// frame errors it still covers at least that probability: the exact interval
// for that rule lies within it.
func (m Measurement) FrameErrorRate(confidence float64) Rate {
	return clopperPearson(float64(m.Counts.FrameErrors), float64(m.Counts.Frames), confidence)
}

// BitErrorRate returns the fraction of bits in error with a confidence
// interval. The bits of a frame fail together, so the interval of Clopper &
// Pearson is taken for the number of independent bits that would have the
// variance observed between frames (Korn & Graubard, Survey Methodology
// 24(2), 1998). It never exceeds the upper end for frames, since the bit error
// rate is at most the frame error rate.
func (m Measurement) BitErrorRate(confidence float64) Rate {
	c := m.Counts
	frames := m.FrameErrorRate(confidence)
	if c.BitErrors == 0 {
		return Rate{0, 0, frames.High}
	}
	n, bits := float64(c.Frames), float64(c.Frames)*float64(m.Length)
	rate := float64(c.BitErrors) / bits
	effective := n // as if a frame were one bit, where the variance is unknown
	mean := float64(c.BitErrors) / n
	if squares := float64(c.BitErrorSquares) - n*mean*mean; n > 1 && squares > 0 {
		variance := squares / (n - 1) / (n * float64(m.Length) * float64(m.Length))
		effective = min(rate*(1-rate)/variance, bits)
	}
	r := clopperPearson(rate*effective, effective, confidence)
	return Rate{rate, r.Low, max(rate, min(r.High, frames.High))}
}
