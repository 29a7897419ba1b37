// Package ooxml reads and changes spreadsheet files in the Office Open XML
// format (ECMA-376, ISO/IEC 29500): zip parts, typed cells in, spliced cells
// out. It knows nothing of what the numbers mean.
//
// Reading. Open finds the parts by their relationships and reads the small
// ones; Book.Scan passes once over a sheet and hands out its rows. Each part is
// read to its end and held against its checksum and length, so that a damaged
// file is refused and never taken for a smaller table. Every refusal is an
// *Error that names part, sheet and cell.
//
// Writing. Splice replaces chosen cells inside the bytes of a sheet and keeps
// every other byte; Book.SaveAs and Book.SaveInPlace write a book in which all
// other parts are copied in their compressed form.
//
// Rows and columns count from 1 throughout, as users see them; sheets count
// from 0, in the order of their tabs.
package ooxml
