//go:build race

package property

// every is the step in which variants of a stage are taken: the race detector looks for races, not for outcomes, and is ten times slower.
const every = 12
