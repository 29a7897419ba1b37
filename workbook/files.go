package workbook

import (
	"cmp"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strings"

	"halfwidth/workbook/ooxml"
)

// Found is a file that a batch came upon.
type Found struct {
	Path     string
	InFolder bool   // it was found in a folder, and not named itself
	Below    string // its own folder, seen from the folder that was named
	Key      string // its path below the folder that was named, else as it was named; with slashes, the same on all systems
	LeftOut  string // why it is no book of the batch; empty for a book
	Err      error  // why it cannot be looked at
}

// Files are what the words of a command line lead to.
type Files struct {
	Found []Found // in the order of their paths
	Batch bool    // there may be several: more than one word, a folder or a pattern
}

// Find looks up files, folders and glob patterns. Folders are searched to their
// depth, except hidden ones, for workbooks and text calculation sheets. Locks of
// other programs, temporary files and a second name of the same file are left
// out, and so are earlier outputs: those in folders, and those whose book is
// named too. With filled, the outputs are what is looked for: a book is left out
// that has its output beside it.
func Find(words []string, filled bool) Files {
	s := search{filled: filled}
	files := Files{Batch: len(words) > 1}
	for _, word := range words {
		info, err := os.Stat(word)
		switch {
		case err == nil && info.IsDir():
			files.Batch = true
			s.folder(word)
		case err != nil && strings.ContainsAny(word, "*?["):
			files.Batch = true
			s.pattern(word)
		default:
			s.named(word)
		}
	}
	slices.SortStableFunc(s.found, func(a, b Found) int {
		return cmp.Or(cmp.Compare(filepath.ToSlash(a.Path), filepath.ToSlash(b.Path)), cmp.Compare(a.LeftOut, b.LeftOut))
	})
	files.Found = s.found
	if files.Batch {
		s.leaveOut()
	}
	return files
}

type search struct {
	filled bool
	found  []Found
}

func (s *search) named(word string) {
	s.found = append(s.found, Found{Path: word, Key: filepath.ToSlash(filepath.Clean(word))})
}

// pattern takes what a pattern matches as if it had been named, as shells do.
func (s *search) pattern(word string) {
	matches, err := filepath.Glob(word)
	hidden := strings.HasPrefix(filepath.Base(word), ".")
	matches = slices.DeleteFunc(matches, func(m string) bool { return !hidden && strings.HasPrefix(filepath.Base(m), ".") })
	switch {
	case err != nil:
		s.fail(word, fmt.Errorf("the pattern has no meaning: %w; write, for instance, books/*.xlsx", err))
	case len(matches) == 0:
		s.fail(word, errors.New("nothing has a name like this"))
	}
	for _, m := range matches {
		if info, err := os.Stat(m); err == nil && info.IsDir() {
			s.folder(m)
		} else {
			s.named(m)
		}
	}
}

func (s *search) fail(path string, err error) {
	s.found = append(s.found, Found{Path: path, Key: filepath.ToSlash(filepath.Clean(path)), Err: err})
}

// folder searches a folder that was named.
func (s *search) folder(root string) {
	var walk func(below string)
	walk = func(below string) {
		list, err := os.ReadDir(filepath.Join(root, below))
		if err != nil {
			s.fail(filepath.Join(root, below), fmt.Errorf("the folder cannot be read: %w", err))
		}
		for _, e := range list {
			at := filepath.Join(below, e.Name())
			why, book := s.judge(e, filepath.Join(root, at))
			switch {
			case e.IsDir() && why == "":
				walk(at)
			case book || why != "":
				s.found = append(s.found, Found{Path: filepath.Join(root, at), InFolder: true, Below: below, Key: filepath.ToSlash(at), LeftOut: why})
			}
		}
	}
	walk("")
}

// judge tells whether an entry of a folder is a book, or why it is left out
// where that must be said. Everything else is passed over.
func (s *search) judge(e fs.DirEntry, path string) (leftOut string, book bool) {
	name, folder := e.Name(), e.IsDir()
	if e.Type()&fs.ModeSymlink != 0 {
		if info, err := os.Stat(path); err == nil && info.IsDir() {
			return "a link to a folder; name the folder itself", false
		}
	}
	hidden := strings.HasPrefix(name, ".")
	switch ending := isBookName(name); {
	case folder && hidden:
		return "a hidden folder", false
	case folder:
		return "", false
	case ooxml.IsLockFile(name):
		return lockFile, false
	case ooxml.IsTempFile(name):
		return "a temporary file of a save that is under way or was cut off", false
	case !ending:
		return "", false
	case hidden:
		return "a hidden file", false
	case !s.filled && IsOutput(name):
		return anOutput, false
	}
	return "", true
}

const (
	lockFile = "a lock file of another program"
	anOutput = "an earlier output"
)

// isBookName tells whether a file's name has the ending of a workbook or a text
// calculation sheet.
func isBookName(name string) bool {
	ext := strings.ToLower(path.Ext(name))
	return ext == ".xlsx" || ext == ".xlsm" || IsTextSheet(name)
}

// leaveOut leaves out what a look at single names cannot tell: a second name of
// the same file, and an output, or else the book that it was made of, where both
// are there.
func (s *search) leaveOut() {
	first := map[string]string{} // path by the file itself
	books := map[string]*Found{} // by path
	for i := range s.found {
		f := &s.found[i]
		if f.LeftOut != "" || f.Err != nil {
			continue
		}
		self := realPath(f.Path)
		switch same, again := first[self]; {
		case ooxml.IsLockFile(f.Path):
			f.LeftOut = lockFile
		case again:
			f.LeftOut = "the same file as " + same
		default:
			first[self] = f.Path
			books[filepath.Clean(f.Path)] = f
		}
	}
	for path, f := range books {
		output := books[OutputName(path)]
		switch {
		case output == nil:
		case s.filled:
			f.LeftOut = "its output is there: " + filepath.Base(output.Path)
		default:
			output.LeftOut = anOutput
		}
	}
}

// realPath is the path of a file behind all links, as far as it can be found.
func realPath(name string) string {
	if real, err := filepath.EvalSymlinks(name); err == nil {
		name = real
	}
	if whole, err := filepath.Abs(name); err == nil {
		return whole
	}
	return name
}

// OutputName is the name of the output that a fill writes beside a file.
func OutputName(path string) string { return outputName(path) }
