package ooxml

import (
	"archive/zip"
	"bytes"
	"encoding/binary"
	"errors"
	"strings"
	"testing"
)

// directoryEntry gives the place of a part's entry in the directory of a zip file
// (APPNOTE.TXT 4.3.12): its name stands 46 bytes on.
func directoryEntry(data []byte, name string) int {
	return bytes.LastIndex(data, []byte(name)) - 46
}

func TestOpenHoldsTheDirectoryAgainstTheEntries(t *testing.T) {
	const sheet1 = "xl/worksheets/sheet1.xml"
	good := smallBook(rows(`<row r="1"><c r="A1"><v>1</v></c></row>`)).with("docProps/app.xml", "<Properties/>").bytes(t)
	uint32At := func(part string, offset int, change func(uint32) uint32) func([]byte) {
		return func(data []byte) {
			at := directoryEntry(data, part) + offset
			binary.LittleEndian.PutUint32(data[at:], change(binary.LittleEndian.Uint32(data[at:])))
		}
	}
	for _, test := range []struct {
		name   string
		change func(data []byte)
		want   string
	}{
		{"an entry within another", func(data []byte) {
			// Its packed bytes are said to reach to the header of the last entry.
			length := bytes.LastIndex(data, []byte("PK\x03\x04")) - bytes.Index(data, []byte(sheet1))
			uint32At(sheet1, 20, func(uint32) uint32 { return uint32(length) })(data)
		}, "part xl/sharedStrings.xml: the part overlaps the part xl/worksheets/sheet1.xml in the file"},
		{"a header used twice", func(data []byte) {
			copy(data[directoryEntry(data, "docProps/app.xml")+42:][:4], data[directoryEntry(data, "_rels/.rels")+42:][:4])
		}, "part docProps/app.xml: the part has another name where it lies than in the file's directory"},
		{"another name in the local header", func(data []byte) { copy(data[bytes.Index(data, []byte(sheet1)):], "xl/worksheets/sheet2.xml") },
			"part xl/worksheets/sheet1.xml: the part has another name where it lies than in the file's directory"},
		{"a packed size beyond the file", uint32At("docProps/app.xml", 20, func(uint32) uint32 { return 1 << 30 }), "part docProps/app.xml: the part is longer than the file"},
		{"a place beyond the file", uint32At("docProps/app.xml", 42, func(uint32) uint32 { return 1 << 30 }), "part docProps/app.xml: the part does not lie where the file's directory says"},
	} {
		data := bytes.Clone(good)
		test.change(data)
		_, err := openBytes(data, Limits{})
		t.Run(test.name, func(t *testing.T) { wantError(t, err, ErrDamaged, "Trips.xlsx: "+test.want) })
	}
	// Names that are the same part but for their spelling are no contradiction.
	data := bytes.Clone(good)
	copy(data[bytes.Index(data, []byte(sheet1)):], `xl\Worksheets\SHEET1.xml`)
	if _, err := openBytes(data, Limits{}); err != nil {
		t.Error(err)
	}
}

// The directory is not read beyond what the limit of entries allows, however
// many entries its end record promises.
func TestOpenReadsNoEndlessDirectory(t *testing.T) {
	whole := smallBook(rows("")).bytes(t)
	end := bytes.LastIndex(whole, []byte("PK\x05\x06"))
	from := int(binary.LittleEndian.Uint32(whole[end+16:]))
	var data []byte
	data = append(data, whole[:from]...)
	const copies = 65536 / 4 // so that the count of entries, modulo 65536, stays 0
	for range copies {
		data = append(data, whole[from:directoryEntry(whole, "xl/worksheets/sheet1.xml")]...)
	}
	size := len(data) - from
	data = append(data, whole[end:]...)
	record := data[len(data)-22:]
	binary.LittleEndian.PutUint32(record[8:], 0)
	binary.LittleEndian.PutUint32(record[12:], uint32(size))
	_, err := openBytes(data, Limits{Entries: 1000})
	wantError(t, err, ErrLimit, "Trips.xlsx: the file's directory is longer than 1000 parts need, which is the limit; if the file can be trusted, raise the limit Entries")
}

// Some programs write entries for folders, deflated to the two bytes of nothing.
func TestEntriesForFoldersAreKept(t *testing.T) {
	var out bytes.Buffer
	z := zip.NewWriter(&out)
	for _, f := range smallBook(rows(`<row r="1"><c r="B1"><v>1</v></c></row>`)) {
		w, err := z.Create(f.name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write([]byte(f.data)); err != nil {
			t.Fatal(err)
		}
	}
	// archive/zip writes no data for folders: the name is changed afterwards.
	w, err := z.CreateRaw(&zip.FileHeader{Name: "xl/media!", Method: zip.Deflate, CompressedSize64: 2})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := w.Write([]byte{3, 0}); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	data := bytes.ReplaceAll(out.Bytes(), []byte("xl/media!"), []byte("xl/media/"))
	written, _ := write(t, open(t, data), oneEdit)
	after, err := zip.NewReader(bytes.NewReader(written), int64(len(written)))
	if err != nil {
		t.Fatal(err)
	}
	if last := after.File[len(after.File)-1]; last.Name != "xl/media/" || last.UncompressedSize64 != 0 {
		t.Errorf("the folder came out as %+v", last.FileHeader)
	}
	if _, err := openBytes(written, Limits{}); err != nil {
		t.Error(err)
	}
	// A folder that holds data is no folder.
	size := directoryEntry(data, "xl/media/") + 24
	data[size] = 1
	_, err = openBytes(data, Limits{})
	wantError(t, err, ErrDamaged, "Trips.xlsx: part xl/media/: the entry is named as a folder and holds data")
}

// Parts that are each small enough may still come to too much.
func TestOpenLimitsTheRatioOfAllParts(t *testing.T) {
	small := smallBook(rows(strings.Repeat(" ", 1<<20)))
	b, err := openBytes(small.bytes(t), Limits{RatioFrom: 1<<20 + 500})
	if err == nil {
		_, err = b.Scan(0, ScanOptions{}, nil)
	}
	if !errors.Is(err, ErrLimit) || !strings.Contains(err.Error(), "the parts read inflate from") {
		t.Errorf("error %v", err)
	}
}

// A fault of a part is told in the same words however the reads fall.
func TestFaultsAreToldAlikeHoweverReadsFall(t *testing.T) {
	data := strings.Repeat(`<row r="1"><c r="A1"><v>1</v></c></row>`, 5000)
	sum, size := uint32(7), uint64(len(data)+5)
	for _, change := range []func(*file){func(f *file) { f.sum = &sum }, func(f *file) { f.size = &size }} {
		book := smallBook("").with("xl/x", data).change("xl/x", change).bytes(t)
		c, err := openContainer(bytes.NewReader(book), int64(len(book)), Limits{}.WithDefaults())
		if err != nil {
			t.Fatal(err)
		}
		for _, step := range []int{1, 1000, 1 << 20} {
			r, err := c.open(c.find("xl/x"))
			if err != nil {
				t.Fatal(err)
			}
			n, b := 0, make([]byte, step)
			for err == nil {
				var k int
				k, err = r.Read(b)
				n += k
			}
			if n != len(data) || !errors.Is(err, ErrDamaged) {
				t.Errorf("%d bytes at a time: %d of %d bytes and error %v", step, n, len(data), err)
			}
		}
	}
}
