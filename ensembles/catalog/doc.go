// Package catalog holds published ensembles and the degree profiles of open
// standards, each with its source and a word for how far it can be trusted.
//
// A name says the source, the design rate in hundredths and the largest
// variable degree: rsu01-r50-d15 is the ensemble of rate 0.50 with degrees up
// to 15 by Richardson, Shokrollahi & Urbanke, 2001. Papers go by the initials
// of their authors and the year, standards by their number.
//
// # What is in it
//
// The regular ensembles of rate 1/4 to 3/4; irregular ones for the Gaussian
// channel with largest degrees from 4 to 8000, and for the binary symmetric
// channel; right-regular and heavy-tail sequences for the erasure channel; and
// the profiles of EN 302 307, IEEE 802.16e and IEEE 802.11n, in node counts.
//
// The parity part of EN 302 307 is a chain that ends in one bit of degree 1.
// The counts have that bit, and because of it the error probability of their
// ensemble never reaches zero, though only one bit in 64800 is concerned. The
// source en302307-closed has the same counts with the chain closed to a ring,
// so that this bit has degree 2 and the first check one edge more; its
// threshold is that of the standard's profile at any greater length.
//
// # What is not
//
// Profiles that a pair of degree distributions cannot describe are left out:
//
//   - 3GPP TS 38.212 (mobile radio) and CCSDS 131.0-B (telemetry, the codes
//     with repeat-accumulate protographs) puncture the variable nodes of
//     highest degree: a punctured node has no channel, while λ gives every
//     node one. They need multi-edge types.
//   - IEEE 802.3an (wired networks) uses a code whose graph comes from a
//     Reed-Solomon construction: its degrees are (6,32)-regular, but what
//     it is used for depends on the structure, not on the degrees.
//   - Spatially coupled ensembles have positions, and a threshold that their
//     degrees alone do not tell.
package catalog
