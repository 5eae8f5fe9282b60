package channel

import "math"

// The signal has unit energy per symbol, x = ±1, and the noise is real with
// standard deviation σ, so N0 = 2σ². On fading channels Es/N0 and Eb/N0 are
// means. Ratios are linear unless a name ends in DB.

// EsN0 returns the energy per symbol over the noise density, 1/(2σ²).
func EsN0(sigma float64) float64 { return 0.5 / sigma / sigma }

// SigmaFromEsN0 undoes EsN0.
func SigmaFromEsN0(ratio float64) float64 { return math.Sqrt(0.5 / ratio) }

// EbN0 returns the energy per information bit over the noise density at the
// rate in information bits per symbol, 1/(2Rσ²).
func EbN0(sigma, rate float64) float64 { return EsN0(sigma) / rate }

// SigmaFromEbN0 undoes EbN0.
func SigmaFromEbN0(ratio, rate float64) float64 { return SigmaFromEsN0(ratio * rate) }

// EsN0DB is EsN0 in dB.
func EsN0DB(sigma float64) float64 { return DB(EsN0(sigma)) }

// SigmaFromEsN0DB undoes EsN0DB.
func SigmaFromEsN0DB(db float64) float64 { return SigmaFromEsN0(FromDB(db)) }

// EbN0DB is EbN0 in dB.
func EbN0DB(sigma, rate float64) float64 { return DB(EbN0(sigma, rate)) }

// SigmaFromEbN0DB undoes EbN0DB.
func SigmaFromEbN0DB(db, rate float64) float64 { return SigmaFromEbN0(FromDB(db), rate) }

// DB returns a ratio of powers in decibels, 10 log₁₀(ratio).
func DB(ratio float64) float64 { return 10 * math.Log10(ratio) }

// FromDB undoes DB.
func FromDB(db float64) float64 { return math.Pow(10, db/10) }
