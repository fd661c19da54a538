// Package decode turns frames into values. A Plan is built once from a checked
// network; running it allocates nothing per frame and keeps no state, so
// blocks of a capture can be decoded on several cores. What needs the order of
// frames (counters, repeats) is the Tracker's.
package decode
