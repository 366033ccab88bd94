// Package stage is the domain model: one half-bridge with its floating supply, the conditions under which it works and the policy by
// which it is judged. All numbers are plain float64 in SI base units, temperatures in °C.
//
// Every value is a Quantity that knows its path in the request, so that a rule which needs a missing one can name it. A Stage comes into
// being in three steps: the caller fills the fields, Check finds the faults that concern several fields at once, and Complete fills missing
// ends of spreads, adds what classes of parts imply and numbers the quantities. What leaves Complete is valid and is never changed again.
package stage
