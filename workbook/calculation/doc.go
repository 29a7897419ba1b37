// Package calculation works out calculation sheets: blocks of rows that each
// name a function of package funcs, its inputs and the results wanted. It knows
// rows of cells, positions and a Source; nothing of workbook files or wires.
//
// # From a sheet to its results
//
// NewPlan reads the calculation sheets of a Source whole and finds their blocks,
// defaults and rows (newCalcSheet). Each input's cell becomes a term: a value,
// the result cell of another row, or a sample expression tied to the sheet it
// names (reader.term, library.bind). Then every sheet that was named is read
// once, and only the columns that expressions use are kept (Source.Read, Frame).
// The faults that need no computation are all in the plan by then.
//
// Plan.Run works the rows out, each after those whose results it reads: it
// gathers the values of each term (bound.gather, pair), calls the function, and
// gives the edits of the result cells. The answers do not depend on the number
// of workers.
//
// # Sample expressions
//
// ParseExpression reads them; Expr.String writes them in one canonical way that
// parses to the same expression. Arguments reads them for callers without a
// calculation sheet, by the same rules.
//
// # What is left out is counted
//
// A cell or row that does not enter a sample is either blank, ruled out by a
// condition that was decided, or counted in a tally that becomes findings with
// addresses. Nothing is skipped in silence.
//
// # Positions
//
// Rows and columns count from 1. A Span is in bytes of one text; conversions to
// characters, UTF-16 units and lines are in pos.go, those between a text file
// and its cells at TextSheet.
package calculation
