package workbook

import (
	"fmt"
	"path/filepath"
	"strings"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// planOptions say which sheets a fill may make or write anew.
func (b *Book) planOptions() calculation.Options {
	o := calculation.Options{MayReplace: b.isOurTable, Kept: b.whyKept}
	if b.StructureLocked() {
		o.NoTables = "the structure of the workbook is protected, so no sheet can be added. Take off that protection, name a table sheet that an earlier fill made"
	}
	return o
}

// tableMark is the defined name, local to a sheet, that marks a table sheet as
// one that a fill made.
const tableMark = "halfwidth_table"

// isOurTable reports whether a sheet is a table sheet that an earlier fill made.
func (b *Book) isOurTable(sheet string) bool {
	at := b.SheetIndex(sheet)
	for _, n := range b.DefinedNames() {
		if at >= 0 && n.Sheet == at && strings.EqualFold(n.Name, tableMark) {
			return true
		}
	}
	return false
}

// whyKept says why a table sheet cannot be written anew: somebody put a formula
// into it, or merged cells of it.
func (b *Book) whyKept(sheet string) string {
	formula := ""
	facts, err := b.Scan(b.SheetIndex(sheet), ooxml.ScanOptions{Columns: &ooxml.Columns{}, Formula: func(row, col int, _ []byte) {
		if formula == "" {
			formula = ooxml.CellName(row, col)
		}
	}}, nil)
	switch {
	case err != nil:
		return "cannot be read: " + err.Error() + ". Repair it"
	case formula != "":
		return "holds a formula in " + formula + ", which is never written over. Delete the formula"
	}
	for merged := range facts.Merged.All() {
		return "has merged cells in " + merged.String() + ". Unmerge them"
	}
	return ""
}

// notes say what a fill does with a signature and with protected sheets.
func (b *Book) notes(plan *calculation.Plan) []string {
	var list []string
	if b.Signed() {
		list = append(list, "The workbook is signed: a filled copy does not keep the signature, and --in-place is refused.")
	}
	for _, name := range plan.Sheets {
		if b.protected[b.SheetIndex(name)] {
			list = append(list, fmt.Sprintf("The sheet %s is protected: its result cells are filled all the same, and the protection is left as it is.", name))
		}
	}
	return list
}

func (b *Book) mayFillInPlace() error {
	if b.Signed() {
		return &ooxml.Error{File: b.Name(), Kind: ooxml.ErrSigned, Reason: "the workbook is signed, and writing into it would break the signature",
			Advice: "leave out --in-place to fill a copy, which does not keep the signature, or remove the signature first"}
	}
	return notLocked(b.Name())
}

// notLocked refuses a file that another program has open, as far as a lock file
// beside it tells.
func notLocked(path string) error {
	if lock, found := ooxml.LockFile(path); found {
		return fmt.Errorf("%s is open in another program (%s is there); close it there first, or fill into another file", path, filepath.Base(lock))
	}
	return nil
}
