// Package ensembles holds what is designed: degree distributions, the
// ensembles of Tanner graphs they describe, profiles (an ensemble with its
// results, as a YAML file) and realizations (exact integer node counts).
package ensembles
