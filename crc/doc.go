// Package crc computes the checksums of message protection: any CRC of 1 to 64
// bits by its parameters, the named ones of the trade, and byte-wise XOR and
// sum.
package crc
