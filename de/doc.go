// Package de is the measuring instrument: it evolves ensembles by several
// methods, one engine per file, finds decoding thresholds, traces, and the
// stability condition.
package de
