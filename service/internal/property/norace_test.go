//go:build !race

package property

// every is the step in which variants of a stage are taken: all of them.
const every = 1
