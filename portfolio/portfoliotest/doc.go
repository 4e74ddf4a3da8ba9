// Package portfoliotest is for tests only: it reads the published values that tests hold the program against.
package portfoliotest
