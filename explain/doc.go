// Package explain has a page for each diagnostic code: what it means, why it
// matters, a wrong example and a right one.
package explain
