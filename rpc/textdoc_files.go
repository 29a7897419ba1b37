package rpc

import (
	"context"
	"sync"

	"halfwidth/workbook/calculation"
)

// lookedUp is what looking for a data file gave: two are equal as long as the
// file is the same.
type lookedUp struct {
	file    dataFile
	refusal string
}

func lookUpFile(folder *dataFolder, name string) lookedUp {
	file, err := folder.Find(name)
	if err != nil {
		return lookedUp{refusal: err.Error()}
	}
	return lookedUp{file: file}
}

// changedSince reports whether some file is not what it was when it was read.
func changedSince(folder *dataFolder, read map[string]lookedUp) bool {
	for name, was := range read {
		if lookUpFile(folder, name) != was {
			return true
		}
	}
	return false
}

// fileShelf keeps what was read of data files, so that a change of a sheet does
// not read them again. What is kept of a file that has changed is not used.
type fileShelf struct {
	mu    sync.Mutex
	kept  map[fileAsRead]*keptFile
	cells int
}

// fileAsRead is a file in one state, read in one way.
type fileAsRead struct {
	file    dataFile
	options calculation.FileOptions
}

// keptFile is the places and the sheets of a file, as far as they were read.
type keptFile struct {
	places []calculation.Place
	late   bool
	sheets map[string]*calculation.Frame
}

func newFileShelf() *fileShelf { return &fileShelf{kept: map[fileAsRead]*keptFile{}} }

// The bounds of what is kept: of a larger file only the columns that are asked
// for are read, each time; past the cells together all is dropped.
const (
	mostKeptBytes = 32 << 20
	mostKeptCells = 20_000_000
)

// besideReader opens the data files of one computation.
type besideReader struct {
	folder *dataFolder
	shelf  *fileShelf
	read   map[string]lookedUp
}

// open is the Beside of a calculation.Source.
func (b *besideReader) open(name string, options calculation.FileOptions) (calculation.Source, error) {
	found := lookUpFile(b.folder, name)
	b.read[name] = found
	if found.refusal != "" {
		return b.folder.Open(name, options) // which gives the reason
	}
	open := func() (calculation.Source, error) { return b.folder.Open(name, options) }
	if found.file.Size > mostKeptBytes {
		return open()
	}
	s := &keptSource{shelf: b.shelf, key: fileAsRead{found.file, options}, open: open}
	b.shelf.mu.Lock()
	s.kept = b.shelf.kept[s.key]
	b.shelf.mu.Unlock()
	if s.kept == nil {
		source, err := open()
		if err != nil {
			return nil, err
		}
		s.source = source
		s.kept = &keptFile{places: source.Places(), late: source.RecalculatesLate(), sheets: map[string]*calculation.Frame{}}
		b.shelf.keep(s.key, s.kept)
	}
	return s, nil
}

// keep puts a file on the shelf, in the place of its earlier states.
func (f *fileShelf) keep(key fileAsRead, file *keptFile) {
	f.mu.Lock()
	defer f.mu.Unlock()
	for other := range f.kept {
		if other == key || other.file.Path == key.file.Path && other.file != key.file {
			f.drop(other)
		}
	}
	f.kept[key] = file
}

func (f *fileShelf) drop(key fileAsRead) {
	for _, frame := range f.kept[key].sheets {
		f.cells -= frame.Held()
	}
	delete(f.kept, key)
}

// keptSource is a data file of which sheets are read once and whole.
type keptSource struct {
	shelf  *fileShelf
	key    fileAsRead
	kept   *keptFile
	open   func() (calculation.Source, error)
	source calculation.Source // nil until something has to be read
}

func (s *keptSource) Places() []calculation.Place { return s.kept.places }

func (s *keptSource) RecalculatesLate() bool { return s.kept.late }

// Beside is refused, as data files hold no expressions.
func (s *keptSource) Beside(file string, options calculation.FileOptions) (calculation.Source, error) {
	source, err := s.reopened()
	if err != nil {
		return nil, err
	}
	return source.Beside(file, options)
}

func (s *keptSource) reopened() (calculation.Source, error) {
	if s.source == nil {
		source, err := s.open()
		if err != nil {
			return nil, err
		}
		s.source = source
	}
	return s.source, nil
}

// Read gives the whole frame of a sheet.
func (s *keptSource) Read(ctx context.Context, sheet string, choose func(head *calculation.Frame) calculation.Columns) (*calculation.Frame, error) {
	s.shelf.mu.Lock()
	frame := s.kept.sheets[sheet]
	s.shelf.mu.Unlock()
	if frame == nil {
		source, err := s.reopened()
		if err != nil {
			return nil, err
		}
		frame, err = source.Read(ctx, sheet, func(*calculation.Frame) calculation.Columns { return calculation.Columns{All: true} })
		if err != nil {
			return nil, err
		}
		s.shelf.add(s.key, sheet, frame)
	}
	choose(frame)
	return frame, nil
}

// add keeps a sheet that was read.
func (f *fileShelf) add(key fileAsRead, sheet string, frame *calculation.Frame) {
	f.mu.Lock()
	defer f.mu.Unlock()
	file := f.kept[key]
	if file == nil || file.sheets[sheet] != nil {
		return // dropped meanwhile, or read by another at the same time
	}
	file.sheets[sheet] = frame
	f.cells += frame.Held()
	if f.cells > mostKeptCells {
		for other := range f.kept {
			if other != key {
				f.drop(other)
			}
		}
	}
	if f.cells > mostKeptCells {
		f.drop(key)
	}
}
