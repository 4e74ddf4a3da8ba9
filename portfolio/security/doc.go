// Package security says who stands behind the treaties: reinsurers, their probability of default, and the simulated years in which they
// fail, likelier in years that are bad for the cedant.
package security
