package main

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// maxDB bounds signal-to-noise ratios in dB: beyond it a channel is perfect
// or useless to the last bit.
const maxDB = 100

// parameterOptions say which channel is meant: its family and one parameter,
// or a signal-to-noise ratio where that fixes it.
type parameterOptions struct {
	channel     channelOption
	degradation nameOption
	parameter   numberOption
	ebN0        numberOption
	esN0        numberOption
	reader      channelReader
}

func (o *parameterOptions) addChannel(cmd *cobra.Command, usage string) {
	o.reader.cmd = cmd
	cmd.Flags().Var(&o.channel, "channel", usage)
	completeChannel(cmd)
	addDegradation(cmd, &o.degradation)
}

// completeChannel offers the names of channels and files to the shell.
func completeChannel(cmd *cobra.Command) {
	err := cmd.RegisterFlagCompletionFunc("channel", func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
		return channel.Names(), cobra.ShellCompDirectiveDefault
	})
	if err != nil {
		panic(fmt.Sprintf("completion of --channel: %v", err)) // an option that does not exist
	}
}

func addDegradation(cmd *cobra.Command, o *nameOption) {
	o.names = brief.Degradations
	cmd.Flags().Var(o, "degradation", "what makes a channel from a file worse: erasure of more bits (parameter ε) or flip of more hard decisions (parameter p); erasure if not given")
	complete(cmd, "degradation", o.names)
}

// channelFileHelp says, in the help of commands, how a channel from a file has
// a threshold.
const channelFileHelp = `A channel may be a file (a name with . or / in it): LLR values measured while
zeros were sent, as CSV with the columns llr and mass or counts, or as YAML; or
the transition matrix of a symmetric channel with two inputs. The channel as
measured gets a parameter by --degradation: a share ε of its bits is erased on
top, or a share p of its hard decisions is flipped. The threshold is the largest
such share with which decoding succeeds.`

// channelOption is the name of a channel, or a file.
type channelOption struct{ value string }

// Set implements pflag.Value.
func (o *channelOption) Set(text string) error {
	if !brief.IsFile(text) && !slices.Contains(channel.Names(), text) {
		return errors.New(brief.ChannelsAllowed() + suggestion(text, channel.Names()))
	}
	o.value = text
	return nil
}

// Type names the value in help texts.
func (o *channelOption) Type() string { return "CHANNEL" }

// String returns what was given.
func (o *channelOption) String() string { return o.value }

// channelsOption is a list of different channels.
type channelsOption struct{ values []string }

// Set reads the list; a second option adds to the first.
func (o *channelsOption) Set(text string) error {
	for item := range strings.SplitSeq(text, ",") {
		var one channelOption
		if err := one.Set(strings.TrimSpace(item)); err != nil {
			return err
		}
		if slices.Contains(o.values, one.value) {
			return fmt.Errorf("each channel once")
		}
		o.values = append(o.values, one.value)
	}
	return nil
}

// Type names the value in help texts.
func (o *channelsOption) Type() string { return "CHANNEL,…" }

// String returns what was given.
func (o *channelsOption) String() string { return strings.Join(o.values, ",") }

func (o *parameterOptions) addParameter(cmd *cobra.Command) {
	o.parameter.allow = document.AtLeast(0)
	o.ebN0.allow = document.FromTo(-maxDB, maxDB)
	o.esN0.allow = o.ebN0.allow
	cmd.Flags().Var(&o.parameter, "parameter", "channel parameter: ε of bec, p of bsc, σ of biawgn and rayleigh, scale b of laplace; ε or p of a file")
	cmd.Flags().Var(&o.ebN0, "eb-n0", "Eb/N0 in dB instead (biawgn; rayleigh: mean)")
	cmd.Flags().Var(&o.esN0, "es-n0", "Es/N0 in dB instead (biawgn; rayleigh: mean)")
}

// family returns the family asked for.
func (o *parameterOptions) family() (channel.Family, error) {
	if o.channel.value == "" {
		return nil, usagef("--channel: missing; allowed: %s", brief.ChannelsAllowed())
	}
	if !brief.IsFile(o.channel.value) && o.degradation.value != "" {
		return nil, usagef("--degradation: found %s; allowed: nothing, because channel %s is not from a file", o.degradation.value, o.channel.value)
	}
	if args := o.reader.cmd.Flags().Args(); o.channel.value == "-" && slices.Contains(args, "-") {
		return nil, usagef("-: standard input can be read once only")
	}
	f, err := o.reader.find(o.channel.value, o.degradation.value)
	return f, invalid(err)
}

// given tells whether a parameter was given in any form.
func (o *parameterOptions) given() bool {
	return o.parameter.given || o.ebN0.given || o.esN0.given
}

// value returns the channel parameter. Eb/N0 needs a rate in information
// bits per code bit; rate is 0 if there is none.
func (o *parameterOptions) value(f channel.Family, rate float64) (float64, error) {
	if !o.parameter.given {
		return o.fromRatio(f, rate)
	}
	best, worst := f.Range()
	allowed := document.Range{Low: best, High: worst, OpenLow: !hasBestChannel(f), OpenHigh: math.IsInf(worst, 1)}
	if !allowed.Contains(o.parameter.value) {
		return 0, usagef("--parameter: found %v; allowed: for %s of channel %s, %v", o.parameter.value, f.Symbol(), f.Name(), allowed)
	}
	return o.parameter.value, nil
}

// hasBestChannel tells whether the perfect channel is itself a member of the
// family, as for erasures and flips, and not only a limit, as for noise.
func hasBestChannel(f channel.Family) bool {
	_, worst := f.Range()
	return !math.IsInf(worst, 1)
}

func (o *parameterOptions) fromRatio(f channel.Family, rate float64) (float64, error) {
	option, db := "--es-n0", o.esN0.value
	if o.ebN0.given {
		option, db = "--eb-n0", o.ebN0.value
	}
	if !hasRatio(f) {
		return 0, usagef("%s: does not fit channel %s; allowed: --parameter, its %s", option, f.Name(), f.Symbol())
	}
	if !o.ebN0.given {
		return channel.SigmaFromEsN0DB(db), nil
	}
	if !(rate > 0) {
		return 0, usagef("--eb-n0: needs a rate above 0, because Eb = Es/rate; allowed: --rate beside it, or --es-n0")
	}
	return channel.SigmaFromEbN0DB(db, rate), nil
}

// hasRatio tells whether the family's parameter is a noise deviation σ with
// which Es/N0 = 1/(2σ²).
func hasRatio(f channel.Family) bool { return f.Parameter() == channel.BIAWGN{}.Parameter() }

// ratios returns Eb/N0 and Es/N0 in dB, nil where the family has none or the
// rate is not positive.
func ratios(f channel.Family, parameter, rate float64) (ebN0, esN0 *float64) {
	if !hasRatio(f) || !(parameter > 0) {
		return nil, nil
	}
	if rate > 0 {
		ebN0 = report.Finite(channel.EbN0DB(parameter, rate))
	}
	return ebN0, report.Finite(channel.EsN0DB(parameter))
}

// complete offers names for the value of an option to the shell.
func complete(cmd *cobra.Command, option string, names []string) {
	err := cmd.RegisterFlagCompletionFunc(option, func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
		return names, cobra.ShellCompDirectiveNoFileComp
	})
	if err != nil {
		panic(fmt.Sprintf("completion of --%s: %v", option, err)) // an option that does not exist
	}
}

// checkParameter refuses two forms of the parameter at once.
func (o *parameterOptions) checkParameter(cmd *cobra.Command) error {
	if err := exclusive(cmd, "parameter", "eb-n0", "es-n0"); err != nil {
		return err
	}
	return exclusive(cmd, "eb-n0", "es-n0")
}

// exclusive refuses the first option beside any of the others.
func exclusive(cmd *cobra.Command, option string, others ...string) error {
	if !cmd.Flags().Changed(option) {
		return nil
	}
	for _, other := range others {
		if cmd.Flags().Changed(other) {
			return usagef("--%s and --%s: only one of the two", option, other)
		}
	}
	return nil
}

// familyOf returns the family asked for, or else the one that the results of
// the profile name.
func (o *parameterOptions) familyOf(p ensembles.Profile) (channel.Family, error) {
	if o.channel.value != "" {
		return o.family()
	}
	name := channelOf(p)
	if name == "" {
		return nil, usagef("--channel: missing, and the profile's results do not name exactly one; allowed: %s", brief.ChannelsAllowed())
	}
	f, err := channel.ByName(name)
	if err != nil {
		return nil, usagef("--channel: missing, and the profile's results are for the channel %s; allowed: the file that it is from, or %s", name, listOf(channel.Names()))
	}
	return f, nil
}
