// Package funcs is the catalogue of statistical functions: what each one is
// called, what it takes, what it gives, and the computation itself.
//
// # Contract
//
// Names. A function, an input and a result each have one lower-case hyphenated
// name, the same in a sheet, on the command line and on the wire.
//
// Units. The catalogue never converts units. A result's Unit says how its unit
// follows from the sample's: the same, its square, or none.
//
// Missing values. A gap in a sample is NaN. Gaps are left out of every sum, but
// they separate neighbours (a lag across a gap is not a lag of one). Infinities
// are refused by name.
//
// Absent results. A result is never NaN or infinite. What does not exist for
// the given inputs (a p-value without a reference, an upper limit of a
// one-sided interval) is absent from the outcome.
//
// Refusals and errors. A call that is well formed but has no statistical answer
// (no spread, too few values) gives an Outcome with status "refused" and the
// reason as a finding. A call that is not well formed (unknown function or
// argument, value outside its domain, both alternatives given) gives an error
// that reports every bad argument at once.
//
// Repeatability. No clock, no global random state, no environment: the same
// inputs give the same digits on every machine, and the same fingerprint.
//
// # Where things are
//
// function.go has the descriptor, call.go and bind.go the way of a call,
// registry.go the list of families; each family has a file of its name, which
// goes on in others (sizes_power.go). The package imports its own internal
// packages alone: dist for laws of probability, num for arithmetic. It knows no
// workbooks, files, wires or terminals.
package funcs
