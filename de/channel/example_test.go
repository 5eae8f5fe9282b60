package channel_test

import (
	"fmt"

	"tannery/de/channel"
)

// The Shannon limit of a half-rate code on every built-in channel.
func ExampleFamily() {
	for _, name := range channel.Names() {
		family, err := channel.ByName(name)
		if err != nil {
			fmt.Println(err)
			return
		}
		limit, err := family.Inverse(0.5)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%s: %s = %.6f", name, family.Symbol(), limit)
		if _, ok := family.SNR(limit); ok && family.Parameter() == "sigma" {
			fmt.Printf(", Eb/N0 = %.4f dB", channel.EbN0DB(limit, 0.5))
		}
		fmt.Println()
	}
	// Output:
	// bec: ε = 0.500000
	// bsc: p = 0.110028
	// biawgn: σ = 0.978694, Eb/N0 = 0.1871 dB
	// laplace: b = 0.752465
	// rayleigh: σ = 0.809962, Eb/N0 = 1.8307 dB
}

// What nobody can beat at 2048 bits and one lost frame in ten thousand.
func ExampleParameterAtLength() {
	sigma, err := channel.ParameterAtLength(channel.BIAWGN{}, 0.5, 2048, 1e-4)
	fmt.Printf("σ = %.4f, Eb/N0 = %.3f dB, %v\n", sigma, channel.EbN0DB(sigma, 0.5), err)
	// Output: σ = 0.8904, Eb/N0 = 1.009 dB, <nil>
}
