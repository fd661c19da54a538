// Package pipeline joins a source, a plan, a tracker and a writer of results
// in one loop, with the accounting.
package pipeline
