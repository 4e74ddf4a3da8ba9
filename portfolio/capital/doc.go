// Package capital turns the net results of simulated years into the capital that a standard requires, each standard with its legal
// source.
package capital
