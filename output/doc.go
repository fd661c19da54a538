// Package output writes what was decoded: a table for people, CSV, wide CSV,
// JSON Lines and a summary, with the accounting. docs/output.md has the columns
// and words.
package output
