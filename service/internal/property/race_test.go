//go:build race

package property

// every is the step in which variants of a stage are taken: the race detector looks for races, not for outcomes, and is ten times slower.
const every = 12

// everySimulated is the stride through the fields of examples whose events are simulated, each of which takes some hundred simulations.
const everySimulated = 48

// tries is the number of random corners that are simulated at every temperature set.
const tries = 2

// randomStages is the number of random stages about each demo stage.
const randomStages = 6

// studied is the number of draws that are held against the extreme values.
const studied = 16
