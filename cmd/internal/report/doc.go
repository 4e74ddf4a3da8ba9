// Package report turns the results of a study into tables for a terminal, JSON, CSV and one HTML paper. It computes nothing that the
// results do not hold.
package report
