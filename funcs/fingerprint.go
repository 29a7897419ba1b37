package funcs

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"hash"
	"math"
)

// fingerprint is the first 16 hexadecimal digits of SHA-256 over the function's
// name, its version and every input in catalogue order after defaults. A number
// enters as its big-endian IEEE 754 bits, -0 as 0, a gap as one marked NaN; a
// text as its length and its UTF-8 bytes; a list as its length and its elements;
// a group with its name before it; an input that was not given as one zero byte.
func (c *Call) fingerprint() string {
	d := &digest{Hash: sha256.New()}
	d.text(c.Function.Name)
	d.number(float64(c.Function.Version))
	for _, in := range c.Function.Inputs {
		d.text(in.Name)
		d.value(c.args[in.Name].Value)
	}
	return hex.EncodeToString(d.Sum(nil))[:16]
}

type digest struct {
	hash.Hash
	buf [128 * 8]byte // numbers on their way into the hash
}

// gapBits is the one NaN that stands for a gap, whatever NaN a reader made.
const gapBits = 0x7FF8_0000_0000_0001

func (d *digest) length(n int) { d.bits(uint64(n)) }

func (d *digest) bits(b uint64) {
	d.Write(binary.BigEndian.AppendUint64(d.buf[:0], b))
}

func (d *digest) number(x float64) { d.bits(numberBits(x)) }

func numberBits(x float64) uint64 {
	switch {
	case math.IsNaN(x):
		return gapBits
	case x == 0:
		return 0
	}
	return math.Float64bits(x)
}

func (d *digest) text(s string) {
	d.length(len(s))
	d.Write([]byte(s))
}

func (d *digest) numbers(v []float64) {
	d.length(len(v))
	for len(v) > 0 {
		n := min(len(v), len(d.buf)/8)
		b := d.buf[:0]
		for _, x := range v[:n] {
			b = binary.BigEndian.AppendUint64(b, numberBits(x))
		}
		d.Write(b)
		v = v[n:]
	}
}

// value writes a kind byte and the value.
func (d *digest) value(v any) {
	switch v := v.(type) {
	case nil:
		d.Write([]byte{0})
	case float64:
		d.Write([]byte{1})
		d.number(v)
	case int:
		d.Write([]byte{1})
		d.number(float64(v))
	case string:
		d.Write([]byte{2})
		d.text(v)
	case bool:
		d.Write([]byte{3})
		if v {
			d.Write([]byte{1})
		} else {
			d.Write([]byte{0})
		}
	case List:
		d.Write([]byte{4})
		d.numbers(v.Values)
		d.length(len(v.Names))
		for _, n := range v.Names {
			d.text(n)
		}
	case []float64:
		d.Write([]byte{5})
		d.numbers(v)
	case []Group:
		d.Write([]byte{6})
		d.length(len(v))
		for _, g := range v {
			d.text(g.Name)
			d.numbers(g.Values)
		}
	}
}
