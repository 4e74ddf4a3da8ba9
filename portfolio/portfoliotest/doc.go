// Package portfoliotest is for tests only: it reads the published values that tests hold the program against, and draws small books and
// programmes whose recoveries it works out by brute force.
package portfoliotest
