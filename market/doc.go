// Package market turns reinsurers' quotes into a price for any treaty: concave distortions and their closed families, fits to quotes,
// and the price of a recovery with brokerage, reinstatements and a minimum rate on line.
package market
