// Package unit holds dimensions, units, exact decimal and rational numbers and
// how they are printed. No floating point stands between a raw value and its
// text.
package unit
