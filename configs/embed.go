// Package configs holds the factor files that ship with the program. The studies beside them are files to start from and are not part of it.
package configs

import "embed"

// Factors holds the shipped factor files, by file name.
//
//go:embed standard-formula-2015-35.yaml
var Factors embed.FS
