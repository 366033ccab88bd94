// Package study draws the inputs of a stage at random and counts what the rules say: a seeded Monte Carlo over tolerances. It tells how far real
// parts stay from the extreme values, what share of them holds a limit and which inputs move a margin. It decides nothing that extreme values
// decide: absolute maxima, lockout, latch-up and shoot-through are judged by the worst-case review, whose values stand beside those of the draws.
//
// Draws. A draw is one copy of the product in one set of conditions. Every input that the worst-case engine moves between its ends is drawn
// between the same ends, independently of the others, by a Distribution. Values of parts are drawn once and are the same part at every operating
// point; values of operating points are drawn for each of them. The temperatures of an operating point, ambient and junction, are drawn
// together: both stand at the same quantile of their ranges. Within a draw every value with entries at temperatures or a known law takes the range
// of that temperature, in which the part keeps its quantile: a part that leaks much when cold leaks much when hot. The points of one curve move
// together, by the quantile of the curve's position.
//
// Numbers. A quantile is a function of the seed, the number of the draw and the path of the input, by the counter-based generator
// Philox4x32-10: neither the number of processors, nor the order of work, nor another input's presence changes it. Operating points count by
// their names, so that their order changes nothing either.
//
// Evaluation. At every draw every rule that judges closed forms is checked at every operating point to which it applies, by the functions of the
// rules' runner: value and limit rounded to six digits, then compared. What cannot be evaluated at a draw is open there and never within a limit:
// data missing, outside the model, an end of a spread that nobody gave and beyond which it gets worse. What is satisfied only under an optimistic
// assumption is at best MARGINAL.
//
// Statistics. Shares carry the Wilson score interval, percentiles the distribution-free interval between two order statistics, both at 95 %.
// Inputs are ranked by Spearman's rank correlation of their quantile with the margin. Intervals tell how exact the draws are for the
// distribution that was chosen; they do not tell that parts are distributed so.
package study
