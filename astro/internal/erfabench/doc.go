// Package erfabench samples stars over a site by the C library ERFA, for
// comparison alone: sky's benchmark measures its own speed and accuracy against
// it in one run. It is empty unless built with the tag erfa, which needs cgo and
// Debian's liberfa-dev; the program itself never uses it.
package erfabench
