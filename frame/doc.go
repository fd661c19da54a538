// Package frame holds one CAN frame as a value (classic, FD, remote, error;
// with its time and bus), the Source that every input implements, and the
// meaning of what the kernel reports in error frames.
package frame
