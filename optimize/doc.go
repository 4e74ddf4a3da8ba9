// Package optimize appraises reinsurance programmes and searches for the best one: what a programme costs, what capital it frees,
// how sure both are, and which programme of a decision space minimises ceded margin plus cost of capital.
package optimize
