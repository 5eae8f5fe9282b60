package main

import (
	"math"
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/ensembles/document"
)

// maxLength is the largest number of code bits asked about.
const maxLength = 1_000_000_000

type limitOptions struct {
	parameterOptions
	rate              numberOption
	sourceRate        numberOption
	sourceProbability numberOption
	symbolRate        numberOption
	length            integerOption
	frameError        numberOption
	matrix            string
}

func newLimit() *cobra.Command {
	o := &limitOptions{
		rate:              numberOption{allow: document.Between(0, 1)},
		sourceRate:        numberOption{allow: document.Above(0)},
		sourceProbability: numberOption{allow: document.FromTo(0, 1)},
		symbolRate:        numberOption{allow: document.Above(0)},
		length:            integerOption{low: 1, high: maxLength},
		frameError:        numberOption{allow: document.Between(0, 1)},
	}
	cmd := &cobra.Command{
		Use:   "limit [options]",
		Short: "what rate a channel allows, or a link needs",
		Example: `# the worst noise at which rate 1/2 can be had
tannery limit --channel biawgn --rate 0.5
# the capacity at a channel parameter, or at Es/N0 in dB
tannery limit --channel bsc --parameter 0.11
tannery limit --channel biawgn --es-n0 -2.5
# is rate 0.8 possible there? if not: the lowest bit error rate for anybody
tannery limit --channel biawgn --parameter 0.9 --rate 0.8
# a link: does a telemetry source fit into the channel, and with what margin?
tannery limit --channel biawgn --parameter 0.94 --source-rate 9600 \
    --source-probability 0.2 --symbol-rate 16000
# at 2048 code bits and one lost frame in 10000
tannery limit --channel biawgn --rate 0.5 --length 2048 --frame-error 1e-4
# a channel that was measured: how many of its bits may be lost at rate 1/2?
tannery limit --channel receiver.csv --rate 0.5
# any discrete memoryless channel, a row of output probabilities per input
tannery limit --matrix buoy.csv`,
		Long: `The Shannon limit in all its forms. With a channel parameter: the capacity there.
With a rate: the parameter at which the capacity equals it. With both: whether
the rate is below capacity, by what margin, and if not the lowest bit error rate
that anybody can reach.

A link (--source-rate and --symbol-rate) fits if the entropy of its source is at
most the capacity times the symbol rate. With --length the normal approximation
tells what codes of so many bits can do on bec, bsc and biawgn.

--matrix reads CSV or YAML and finds the capacity by the iteration of Arimoto
and Blahut, with bounds from both sides and the input distribution reaching it.

A channel may be a file (a name with . or / in it): LLR values measured while
zeros were sent, as CSV with the columns llr and mass or counts, or as YAML; or
a symmetric transition matrix with two inputs. Its parameter is the share ε of
bits erased on top, or with --degradation flip the share p of hard decisions
flipped on top: --parameter 0 is the channel as measured.`,
		Args: atMost(0, "options only"),
		RunE: func(cmd *cobra.Command, _ []string) error { return runLimit(cmd, o) },
	}
	o.addChannel(cmd, "the channel: bec, bsc, biawgn, laplace, rayleigh, or a file")
	o.addParameter(cmd)
	f := cmd.Flags()
	f.Var(&o.rate, "rate", "code rate in information bits per code bit")
	f.Var(&o.sourceRate, "source-rate", "bits per second of the source of a link")
	f.Var(&o.sourceProbability, "source-probability", "probability of a one in the source; 0.5 if not given")
	f.Var(&o.symbolRate, "symbol-rate", "channel symbols per second of a link")
	f.Var(&o.length, "length", "code bits, for the limit at that length")
	f.Var(&o.frameError, "frame-error", "frame error rate wanted at that length")
	f.StringVar(&o.matrix, "matrix", "", "`FILE` with a transition matrix, CSV or YAML, or -")
	return cmd
}

// check refuses combinations of options that have no meaning together.
func (o *limitOptions) check(cmd *cobra.Command) error {
	if err := o.checkParameter(cmd); err != nil {
		return err
	}
	changed := cmd.Flags().Changed
	link := changed("source-rate") || changed("source-probability") || changed("symbol-rate")
	switch {
	case changed("matrix"):
		return exclusive(cmd, "matrix", "channel", "parameter", "eb-n0", "es-n0", "rate", "length", "frame-error")
	case link && !(changed("source-rate") && changed("symbol-rate")):
		return usagef("a link needs both --source-rate and --symbol-rate")
	case link && changed("rate"):
		return usagef("--rate: has no place beside a link, whose rate follows from it")
	case link && !o.given():
		return usagef("--parameter: missing; a link needs the parameter of its channel, or --es-n0")
	case changed("frame-error") && !changed("length"):
		return usagef("--frame-error: needs --length beside it")
	case changed("length") && link:
		return usagef("--length: has no place beside a link; ask again with --rate")
	case !o.given() && !changed("rate"):
		return usagef("--parameter or --rate: one of them is needed (or --eb-n0, --es-n0, --matrix)")
	case changed("length") && !changed("frame-error") && !(o.given() && changed("rate")):
		return usagef("--frame-error: missing; --length needs two of --frame-error, --rate and --parameter")
	}
	return nil
}

func runLimit(cmd *cobra.Command, o *limitOptions) error {
	if err := o.check(cmd); err != nil {
		return err
	}
	if o.matrix != "" {
		return runMatrix(cmd, o)
	}
	f, err := o.family()
	if err != nil {
		return err
	}
	answer := &report.Limit{Schema: "tannery/limit/1", Channel: f.Name(), Parameter: f.Parameter(), Symbol: f.Symbol(), Warnings: slices.Concat([]string{}, o.reader.warnings)}
	if err := o.shannon(f, answer); err != nil {
		return err
	}
	if o.length.given {
		if err := o.finite(f, answer); err != nil {
			return err
		}
	}
	return deliver(cmd, answer)
}

// shannon fills in what holds for codes of any length.
func (o *limitOptions) shannon(f channel.Family, answer *report.Limit) error {
	rate := o.rate.pointer()
	if !o.given() {
		value, err := f.Inverse(*rate)
		if err != nil {
			return usagef("--rate: %w", err)
		}
		answer.Value, answer.Rate, answer.Capacity = &value, rate, new(f.Capacity(value))
		answer.EbN0DB, answer.EsN0DB = ratios(f, value, *rate)
		return nil
	}
	value, err := o.value(f, o.rate.value)
	if err != nil {
		return err
	}
	capacity := f.Capacity(value)
	answer.Value, answer.Capacity, answer.Rate = &value, &capacity, rate
	switch {
	case o.sourceRate.given:
		if answer.Link, err = o.link(capacity); err != nil {
			return err
		}
		answer.Rate = &answer.Link.CodeRate
	case rate == nil:
		answer.Rate = answer.Capacity
	default:
		answer.Question = question(f, value, capacity, *rate)
	}
	answer.EbN0DB, answer.EsN0DB = ratios(f, value, *answer.Rate)
	return nil
}

// question compares a rate with the capacity at a parameter.
func question(f channel.Family, value, capacity, rate float64) *report.RateQuestion {
	q := &report.RateQuestion{
		Fits:               rate <= capacity,
		Margin:             capacity - rate,
		LowestBitErrorRate: channel.LowestBitErrorRate(rate, capacity),
	}
	if limit, err := f.Inverse(rate); err == nil {
		q.LimitValue = &limit
		q.MarginDB = decibels(f, value, limit)
	}
	return q
}

// decibels returns by how many dB of signal-to-noise ratio the first
// parameter is the better channel, nil for families without one.
func decibels(f channel.Family, better, worse float64) *float64 {
	a, ok := f.SNR(better)
	b, _ := f.SNR(worse)
	if !ok || !(a > 0 && b > 0) {
		return nil
	}
	return report.Finite(channel.DB(a / b))
}

func (o *limitOptions) link(capacity float64) (*report.LinkAnswer, error) {
	link := channel.Link{BitRate: o.sourceRate.value, BitProbability: 0.5, SymbolRate: o.symbolRate.value, Capacity: capacity}
	if o.sourceProbability.given {
		link.BitProbability = o.sourceProbability.value
	}
	b, err := link.Budget()
	if err != nil {
		return nil, invalid(err)
	}
	if math.IsInf(b.RawCodeRate, 1) {
		return nil, usagef("--source-rate and --symbol-rate: found %v and %v; allowed: rates whose ratio is a number", link.BitRate, link.SymbolRate)
	}
	return &report.LinkAnswer{
		SourceRate:         link.BitRate,
		SourceProbability:  link.BitProbability,
		SymbolRate:         link.SymbolRate,
		SourceEntropy:      b.SourceEntropy,
		EntropyRate:        b.EntropyRate,
		CapacityRate:       b.CapacityRate,
		Fits:               b.Fits,
		CodeRate:           b.CodeRate,
		RawCodeRate:        b.RawCodeRate,
		LargestCodeRate:    b.LargestCodeRate,
		Margin:             b.Margin,
		MarginRate:         b.MarginRate,
		LowestBitErrorRate: b.LowestBitErrorRate,
	}, nil
}

// finite adds the normal approximation at the length asked for.
func (o *limitOptions) finite(f channel.Family, answer *report.Limit) error {
	dispersed, ok := f.(channel.Dispersed)
	if !ok {
		return usagef("--length: the normal approximation covers bec, bsc and biawgn; found channel %s", f.Name())
	}
	n := o.length.value
	finite := &report.FiniteLength{Length: n, FrameError: o.frameError.pointer()}
	answer.Finite = finite
	if !o.given() {
		value, err := channel.ParameterAtLength(dispersed, o.rate.value, n, o.frameError.value)
		if err != nil {
			return invalid(err)
		}
		finite.Value, finite.LossDB = &value, decibels(f, value, *answer.Value)
		finite.EbN0DB, finite.EsN0DB = ratios(f, value, o.rate.value)
		return nil
	}
	if !o.frameError.given {
		least, err := channel.FrameErrorAtLength(dispersed, *answer.Value, o.rate.value, n)
		finite.FrameError = &least
		return invalid(err)
	}
	largest, err := channel.RateAtLength(dispersed, *answer.Value, n, o.frameError.value)
	finite.Rate = &largest
	if o.rate.given {
		finite.Reachable = new(o.rate.value <= largest)
	}
	return invalid(err)
}
