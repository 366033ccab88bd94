//go:build !race

package property

// every is the step in which variants of a stage are taken: all of them.
const every = 1

// everySimulated is the stride through the fields of examples whose events are simulated, each of which takes some hundred simulations.
const everySimulated = 3

// tries is the number of random corners that are simulated at every temperature set.
const tries = 24

// randomStages is the number of random stages about each demo stage.
const randomStages = 120

// studied is the number of draws that are held against the extreme values.
const studied = 300
