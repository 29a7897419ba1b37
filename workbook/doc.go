// Package workbook does the work on files: it reads a workbook or a text
// calculation sheet as the source of samples, works out its calculation sheets
// and writes the results beside the questions (Fill), shows what would be read
// (Preview), compares what is stored with what it would be now (Verify), or
// works everything out for a caller to show (Work). Find lists the files that the
// words of a command line lead to; WriteStarter writes a new workbook.
//
// Contract:
//   - A file is written whole or not at all, and only by Fill and WriteStarter.
//     What a fill does not change keeps its bytes; a second fill changes nothing.
//   - A file that is damaged, or inconsistent in itself, is an error that names
//     part, sheet and cell. What is wrong with a row is a finding of its report,
//     not an error.
//   - An output that was changed since it was filled is kept, unless Options
//     say otherwise.
//   - Files that expressions name are read beside the workbook and below its
//     folder, and in the folders of Options.Data.
//   - The report and the bytes written do not depend on the number of workers.
//
// Blocks, expressions and the order of rows are package calculation's; zip parts
// and cells are package ooxml's; statistics are package funcs'. This package knows
// nothing of terminals, pages and wires.
package workbook
