// Package property holds tests of the calculation as a whole, on the demo stages: what must hold whatever the numbers are. It has no code of
// its own; the tests stand here because they read stages as requests, which calc does not know.
//
//	deletion    what is not known never makes a rule pass
//	widening    a wider range never improves an outcome
//	adverse     worsening an adverse input never improves a margin
//	draws       no part inside its ranges is worse than the reported worst
//	coherent    the inputs of a corner belong to one temperature
//	same        the same request gives the same report, whatever the order of its parts and operating points
//	derive      derived limits turn where they say; spaces that rules share change no number
//	catalogue   every rule passes, is marginal, is open and fails on some stage
//	critical    of a sound stage one parameter makes each CRITICAL rule fail, and without its data it does not pass
//	sound       well-designed stages raise no false alarm
//	outcomes    the table of outcomes over the corpus
//	sampler     a draw in the memory of others is what it is in a space of its own
//	study       no draw of a tolerance study lies beyond the worst case; studies depend on nothing but their request
//	sizing      the parts that sizing recommends pass the review
package property
