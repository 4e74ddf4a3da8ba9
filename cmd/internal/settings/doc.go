// Package settings turns a study file into typed values, with every fault at once and each in its place, and collects the settings of a
// run from flags, environment and study. It is the only package that knows viper.
package settings
