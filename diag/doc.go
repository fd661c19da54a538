// Package diag holds source files, spans and diagnostics: every problem that
// Busloom reports about a text has a stable code, a severity, one tight span,
// optional related spans, one sentence saying what is wrong and one saying
// what to do. The package renders them for people (with the source line and a
// marker) and as JSON, and keeps the catalogue of codes.
package diag
