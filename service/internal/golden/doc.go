// Package golden holds no code, only tests of what stands beside the code: the golden answers and the hand sheets of testdata/stages, and
// what README.md and DEVELOPERS.md print.
package golden
