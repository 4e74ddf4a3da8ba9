// Package study runs one renewal decision: it turns the settings of a study into a book, market curves, programmes, standards and a
// decision space, and answers the verbs of the command with plain results. It prints nothing.
package study
