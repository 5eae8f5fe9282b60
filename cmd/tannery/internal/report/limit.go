package report

import "io"

// Limit is the answer of the command limit, in all its forms. What a form
// does not speak of is null in JSON.
type Limit struct {
	Schema    string   `json:"schema"`
	Channel   string   `json:"channel"`
	Parameter string   `json:"parameter"` // key of the family's parameter
	Value     *float64 `json:"value"`     // of the parameter
	Rate      *float64 `json:"rate"`      // asked for, or else the capacity at Value
	EbN0DB    *float64 `json:"eb_n0_db"`  // at Value and Rate
	EsN0DB    *float64 `json:"es_n0_db"`

	Capacity *float64 `json:"capacity"` // at Value, bits per channel use
	// Question is set where a rate was asked about at a parameter.
	Question *RateQuestion `json:"question,omitempty"`
	Link     *LinkAnswer   `json:"link,omitempty"`
	Finite   *FiniteLength `json:"finite_length,omitempty"`

	Warnings []string `json:"warnings"`

	Symbol string `json:"-"`
}

// RateQuestion answers whether a rate can be had at a channel parameter.
type RateQuestion struct {
	Fits               bool     `json:"fits"`
	Margin             float64  `json:"margin"`    // capacity minus rate
	LimitValue         *float64 `json:"limit"`     // the parameter whose capacity is the rate
	MarginDB           *float64 `json:"margin_db"` // in signal-to-noise ratio
	LowestBitErrorRate float64  `json:"lowest_bit_error_rate"`
}

// LinkAnswer answers whether a source fits a channel.
type LinkAnswer struct {
	SourceRate         float64 `json:"source_rate"`
	SourceProbability  float64 `json:"source_probability"`
	SymbolRate         float64 `json:"symbol_rate"`
	SourceEntropy      float64 `json:"source_entropy"`
	EntropyRate        float64 `json:"entropy_rate"`
	CapacityRate       float64 `json:"capacity_rate"`
	Fits               bool    `json:"fits"`
	CodeRate           float64 `json:"code_rate"`
	RawCodeRate        float64 `json:"raw_code_rate"`
	LargestCodeRate    float64 `json:"largest_code_rate"`
	Margin             float64 `json:"margin"`
	MarginRate         float64 `json:"margin_rate"`
	LowestBitErrorRate float64 `json:"lowest_bit_error_rate"`
}

// FiniteLength is the normal approximation at a length.
type FiniteLength struct {
	Length     int      `json:"length"`
	FrameError *float64 `json:"frame_error"` // asked for, or the least at the parameter and rate
	Rate       *float64 `json:"rate"`        // the largest at the parameter
	Value      *float64 `json:"value"`       // the worst parameter at the rate
	EbN0DB     *float64 `json:"eb_n0_db"`    // at that parameter
	EsN0DB     *float64 `json:"es_n0_db"`
	LossDB     *float64 `json:"loss_db"`   // from the Shannon limit to it
	Reachable  *bool    `json:"reachable"` // where rate, parameter and frame error were all given
}

// Precision of texts: the computations are good to 1e-9 or better.
const (
	rateDigits  = 6
	valueDigits = 7
)

// WriteText writes the answer for people.
func (l *Limit) WriteText(w io.Writer) error {
	var t Text
	switch {
	case l.Link != nil:
		l.linkText(&t)
	case l.Question != nil:
		l.questionText(&t)
	case l.Rate == l.Capacity:
		t.Heading("Capacity of %s at %s = %s", l.Channel, l.Symbol, short(*l.Value))
		t.Row("capacity", "%s bits per channel use", Significant(*l.Capacity, rateDigits))
		ratioRows(&t, "Eb/N0 at this rate", l.EbN0DB, l.EsN0DB)
	default:
		t.Heading("Shannon limit of %s at rate %s", l.Channel, Plain(*l.Rate))
		t.Row(l.parameterName(), "%s", Significant(*l.Value, valueDigits))
		ratioRows(&t, "Eb/N0", l.EbN0DB, l.EsN0DB)
	}
	if l.Finite != nil {
		l.finiteText(&t)
	}
	for _, warning := range l.Warnings {
		t.Row("note", "%s", warning)
	}
	_, err := t.WriteTo(w)
	return err
}

// parameterName is the parameter's key with its symbol, once if they agree.
func (l *Limit) parameterName() string {
	if l.Parameter == l.Symbol {
		return l.Parameter
	}
	return l.Parameter + " " + l.Symbol
}

func ratioRows(t *Text, label string, ebN0, esN0 *float64) {
	if ebN0 != nil {
		t.Row(label, "%s dB", Fixed(*ebN0, 4))
	}
	if esN0 != nil {
		t.Row("Es/N0", "%s dB", Fixed(*esN0, 4))
	}
}

func (l *Limit) questionText(t *Text) {
	q := l.Question
	t.Heading("Rate %s on %s at %s = %s", Plain(*l.Rate), l.Channel, l.Symbol, short(*l.Value))
	t.Row("capacity", "%s bits per channel use", Significant(*l.Capacity, rateDigits))
	if q.Fits {
		t.Row("rate", "below capacity by %s bits per channel use", Significant(q.Margin, 4))
	} else {
		t.Row("rate", "above capacity by %s bits per channel use", Significant(-q.Margin, 4))
		t.Row("lowest bit error rate", "%s for anybody at this rate", Significant(q.LowestBitErrorRate, 4))
	}
	if q.LimitValue != nil {
		t.Row("Shannon limit", "%s = %s at this rate", l.Symbol, Significant(*q.LimitValue, valueDigits))
	}
	if q.MarginDB != nil {
		t.Row("distance to it", "%s dB", Fixed(*q.MarginDB, 3))
	}
	ratioRows(t, "Eb/N0", l.EbN0DB, l.EsN0DB)
}

func (l *Limit) linkText(t *Text) {
	k := l.Link
	if k.Fits {
		t.Heading("The source fits the channel")
	} else {
		t.Heading("The source does not fit the channel")
	}
	t.Row("source", "%s bits per second, ones with probability %s", Plain(k.SourceRate), Plain(k.SourceProbability))
	t.Row("source entropy", "%s bits per bit, %s bits per second", Trimmed(k.SourceEntropy, rateDigits), Significant(k.EntropyRate, rateDigits))
	if l.Value != nil {
		t.Row("channel", "%s at %s = %s, %s symbols per second", l.Channel, l.Symbol, short(*l.Value), Plain(k.SymbolRate))
	} else {
		t.Row("channel", "%s, %s symbols per second", l.Channel, Plain(k.SymbolRate))
	}
	t.Row("capacity", "%s bits per symbol, %s bits per second", Significant(*l.Capacity, rateDigits), Significant(k.CapacityRate, rateDigits))
	t.Row("largest code rate", "%s bits per symbol", Significant(k.LargestCodeRate, rateDigits))
	t.Row("code rate needed", "%s for the source compressed, %s as it is", Trimmed(k.CodeRate, rateDigits), Trimmed(k.RawCodeRate, rateDigits))
	t.Row("margin", "%s bits per symbol, %s bits per second", Significant(k.Margin, 4), Significant(k.MarginRate, 4))
	if !k.Fits {
		t.Row("lowest bit error rate", "%s of the source bits, for anybody", Significant(k.LowestBitErrorRate, 4))
	}
	ratioRows(t, "Eb/N0 at needed rate", l.EbN0DB, l.EsN0DB)
}

func (l *Limit) finiteText(t *Text) {
	f := l.Finite
	t.Heading("With %d code bits (normal approximation)", f.Length)
	if f.FrameError != nil {
		if l.Question != nil && f.Reachable == nil {
			t.Row("lowest frame error rate", "%s", Significant(*f.FrameError, 4))
		} else {
			t.Row("frame error rate", "%s", Plain(*f.FrameError))
		}
	}
	switch {
	case f.Reachable != nil && *f.Reachable:
		t.Row("rate", "reachable; the largest is %s", Significant(*f.Rate, rateDigits))
	case f.Reachable != nil:
		t.Row("rate", "out of reach; the largest is %s", Significant(*f.Rate, rateDigits))
	case f.Rate != nil && l.Question == nil:
		t.Row("largest rate", "%s bits per channel use", Significant(*f.Rate, rateDigits))
	}
	if f.Value != nil {
		t.Row(l.parameterName(), "%s at most", Significant(*f.Value, valueDigits))
		ratioRows(t, "Eb/N0", f.EbN0DB, f.EsN0DB)
	}
	if f.LossDB != nil {
		t.Row("loss by the length", "%s dB", Fixed(*f.LossDB, 3))
	}
}
