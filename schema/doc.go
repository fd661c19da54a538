// Package schema compiles descriptions into the checked, immutable model of a
// network: its buses, ECUs, messages and signals with every name resolved,
// every formula reduced and every layout proven. It also writes and reads the
// model as a database, formats descriptions and draws layouts.
package schema
