// Package ga drives a genetic search with eaopt for two objectives and one scalar at once. It is the only package that knows eaopt, and
// guards against its traps: operators change their receiver only, fitness is never NaN or infinite, the best of a generation is kept,
// and evaluation happens in batches that the caller may spread over workers.
package ga
