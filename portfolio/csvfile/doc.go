// Package csvfile reads comma-separated files with named columns, in any order, and collects what is wrong with them, each fault with
// file, line, column and the text found.
package csvfile
