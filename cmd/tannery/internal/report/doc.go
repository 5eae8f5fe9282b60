// Package report is how answers leave: as text for people, JSON, CSV and
// YAML. It renders recorded results and computes nothing but roundings.
package report
