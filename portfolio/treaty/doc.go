// Package treaty holds what a reinsurance contract says and what it therefore pays: terms, the inuring order of a programme, and
// the plain application of a programme to a loss table, which is the reference for every faster engine.
package treaty
