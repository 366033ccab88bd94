// Package convert is the one place that knows both the wire and the domain. It binds requests to the domain model and writes reports as
// responses.
//
// Binding is one generic walk. New reads from the contract's descriptors which field of a message goes to which field of the domain
// struct, and what its (floatrail.v1.value) option declares: dimension, plausible range, meaning of absence. Every value of a request is
// parsed and checked by that declaration; every fault is collected with its path in JSON names, and all are reported at once. A value that
// was not given still becomes a quantity that knows its path and its declaration.
package convert
