package funcs

import (
	"cmp"
	"slices"
	"strings"
)

// Severity ranks findings.
type Severity int

// The severities, least first.
const (
	Information Severity = iota // leaves the status ok
	Caution                     // computed, but something should be known
	Refused                     // not computed, and why
)

// String is the severity's word.
func (s Severity) String() string { return [...]string{"information", "caution", "refused"}[s] }

// Finding is something that a call found about its data or assumptions.
type Finding struct {
	Code     string // stable, kebab-case
	Severity Severity
	Input    string   // the input concerned, or ""
	Message  string   // one or two sentences; says what to do
	Cells    []string // addresses, where the data came from a sheet
}

// FindingKind declares a finding that a function can raise.
type FindingKind struct {
	Code    string
	Meaning string // when it is raised
}

// Status is the status of an outcome.
type Status string

// The statuses.
const (
	StatusOK      Status = "ok"
	StatusCaution Status = "caution"
	StatusRefused Status = "refused"
)

// StatusOf is the status that findings make: that of the most serious one.
func StatusOf(findings []Finding) Status {
	status := StatusOK
	for _, f := range findings {
		switch f.Severity {
		case Refused:
			return StatusRefused
		case Caution:
			status = StatusCaution
		}
	}
	return status
}

// SortFindings puts the most serious findings first; equals keep their order.
func SortFindings(findings []Finding) {
	slices.SortStableFunc(findings, func(a, b Finding) int { return cmp.Compare(b.Severity, a.Severity) })
}

// Note joins the messages of findings, in their order, into one text.
func Note(findings []Finding) string {
	parts := make([]string, len(findings))
	for i, f := range findings {
		parts[i] = f.Message
	}
	return strings.Join(parts, " ")
}
