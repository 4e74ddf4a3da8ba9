// Package cli is the command: it reads flags, runs one verb of a study, and writes results to standard output and everything else to
// standard error. It exits with 0 when done, 1 when it failed, 2 on wrong usage or a faulty study.
package cli
