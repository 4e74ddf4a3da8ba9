// Package sample measures a finite, equally weighted sample of annual losses: mean, value at risk, tail value at risk, integral
// under a distortion, natural allocation weights, and the sampling error of each. It holds the one rank function of the program.
package sample
