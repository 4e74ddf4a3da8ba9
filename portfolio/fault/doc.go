// Package fault is the one way this program reports what is wrong with an input: where it stands, what was found there,
// what is allowed and, for a misspelt word, the nearest known one. Readers collect every fault before they give up.
package fault
