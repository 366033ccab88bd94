// Package corner is the one place where worst cases are formed.
//
// Sets. For each operating point the inputs are formed per temperature: cold (all temperatures at their minima), room (25 °C, or the
// nearest temperature that the point reaches) and hot (all at their maxima). Within a set a value with entries at temperatures or a known
// law moves with the temperature of its part, so that a cold diode drop is never combined with a hot leakage; what remains is the spread
// from part to part, independent for each input.
//
// Search. A Function maps a Draw (one number for every input) to a number. For each set its direction in every input that it reads is found
// by moving one input at a time from the typical draw; all inputs are then set to their worse ends together and, at the worst set, moved
// once more one at a time until nothing gets worse. Inputs in which the function turns, and the values of operating points, are also
// sampled between their ends. The search keeps the worst of everything it has seen.
//
// A function that cannot be evaluated at some draw of the search is not decided there, but what it was found to violate elsewhere stands. So is
// one that gets worse beyond an end that nobody gave. Points of one curve move together, by one input between -1 and 1.
//
// Functions read inputs only through Draw.Need, which records what was read and what was missing. Nothing here knows models or rules.
package corner
