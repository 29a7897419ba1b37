package rpc

import (
	"io"
	"os"
	"path/filepath"
	"strings"

	"halfwidth/workbook/calculation"
)

// mostRelatedBytes is how long a data file may be in which cells are shown.
const mostRelatedBytes = 4 << 20

// relatedPlaces finds the places of cells that findings name: in the document,
// and in the text files that it reads.
type relatedPlaces struct {
	*workedText
	files map[string]*textState // by the name in expressions; nil where it cannot be shown
}

// of gives the places of the cells of a finding, but for the one that it stands
// at; of the cells of a data file only the first, which the message names.
func (r *relatedPlaces) of(d calculation.Diagnostic) []relatedPlace {
	var list []relatedPlace
	shown := map[*textState]bool{}
	for _, address := range d.Cells {
		at := strings.LastIndexByte(address, '!')
		if at < 0 {
			continue
		}
		cell, ok := calculation.ParseCell(address[at+1:])
		in, message := r.textState, address[at+1:]
		if sheet := address[:at]; sheet != calculation.TextSheetName {
			in, message = r.file(sheet), address
		}
		if !ok || in == nil || in == r.textState && cell == d.Cell || in != r.textState && shown[in] {
			continue
		}
		if _, there := in.sheet.CellSpan(cell); there {
			shown[in] = true
			list = append(list, relatedPlace{location{in.uri, in.span(cell, calculation.Span{})}, message})
		}
	}
	return list
}

// file reads a data file that the document has read, to find places in it.
func (r *relatedPlaces) file(label string) *textState {
	for name, looked := range r.read {
		if nameInText(name) != label {
			continue
		}
		if _, known := r.files[name]; !known {
			r.files[name] = placesIn(looked.file, r.lines.utf8)
		}
		return r.files[name]
	}
	return nil
}

func placesIn(file dataFile, utf8 bool) *textState {
	if file.Size > mostRelatedBytes || isBook(file.Path) {
		return nil
	}
	f, err := os.Open(file.Path)
	if err != nil {
		return nil // it has gone since
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, mostRelatedBytes))
	if err != nil {
		return nil
	}
	t := &textState{uri: uriOf(file.Path), name: filepath.Base(file.Path), lines: newLines(string(text), utf8)}
	if t.parsed() == nil {
		return nil
	}
	return t
}
