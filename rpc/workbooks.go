package rpc

import "halfwidth/workbook"

// dataFolder gives the data files that a text calculation sheet may name.
type dataFolder = workbook.Beside

// dataFile is a data file as it was found.
type dataFile = workbook.DataFile

// openBeside gives the data files of the sheet at path, in folders that the
// client has open.
func openBeside(path string, folders []string) *dataFolder { return workbook.OpenBeside(path, folders) }

// isTextSheet reports whether a file's name is that of a text calculation sheet.
func isTextSheet(name string) bool { return workbook.IsTextSheet(name) }
