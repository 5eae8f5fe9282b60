// Package optimize searches for the degree distributions whose decoding
// threshold comes closest to the Shannon limit at a given rate.
package optimize
