// Package gen makes random descriptions for tests: texts that the grammar
// allows, whatever their names, places and units mean, in any layout.
package gen
