// Package loss holds the book: the losses before reinsurance of every simulated year by event, class, peril and risk, in columns
// that never change once built, the readers of loss tables and the frequency–severity models that simulate one.
package loss
