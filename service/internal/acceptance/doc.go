// Package acceptance holds tests alone.
package acceptance
