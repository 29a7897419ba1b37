package ooxml

import (
	"bytes"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/klauspost/compress/flate"
)

// A lent deflater has seen other parts before; nothing of them may show.
func TestALentDeflaterWritesWhatAFreshOneWrites(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for i := range 200 {
		var text strings.Builder
		for n := rng.IntN(1 << (4 + i%12)); text.Len() < n; {
			fmt.Fprintf(&text, `<c r="B%d"><v>%v</v></c>`, rng.IntN(1000), rng.IntN(1+i*i))
		}
		var fresh, lent bytes.Buffer
		f, err := flate.NewWriter(&fresh, compression)
		if err != nil {
			t.Fatal(err)
		}
		l, err := newDeflater(&lent)
		if err != nil {
			t.Fatal(err)
		}
		for _, w := range []io.WriteCloser{f, l} {
			if _, err := io.WriteString(w, text.String()); err != nil {
				t.Fatal(err)
			}
			if err := w.Close(); err != nil {
				t.Fatal(err)
			}
		}
		if !bytes.Equal(fresh.Bytes(), lent.Bytes()) {
			t.Fatalf("part %d of %d bytes: %d bytes fresh, %d lent", i, text.Len(), fresh.Len(), lent.Len())
		}
		in := newInflater(&lent)
		back, err := io.ReadAll(in)
		in.release()
		if err != nil || string(back) != text.String() {
			t.Fatalf("part %d comes back as %d of %d bytes: %v", i, len(back), text.Len(), err)
		}
	}
}
