package main

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"strconv"
	"strings"
)

// shard is one of several parts of a batch, for as many machines. The zero shard
// is the whole.
type shard struct{ number, of int }

// shardOf reads K/N.
func shardOf(text string) (shard, error) {
	if text == "" {
		return shard{}, nil
	}
	first, second, found := strings.Cut(text, "/")
	k, err1 := strconv.Atoi(first)
	n, err2 := strconv.Atoi(second)
	switch {
	case !found || err1 != nil || err2 != nil || n < 1:
		return shard{}, usageError{fmt.Errorf("--shard is %q; write which part of how many, such as 1/3", text)}
	case k < 1 || k > n:
		return shard{}, usageError{fmt.Errorf("--shard is %s, but %d parts are numbered from 1/%d to %d/%d", text, n, n, n, n)}
	}
	return shard{k, n}, nil
}

// holds tells whether a file belongs to the shard. That rests on the file's own
// path only (the first 8 bytes of its SHA-256, big-endian, modulo the number of
// shards), so that each file is in one shard, and stays there when others come
// and go.
func (s shard) holds(key string) bool {
	if s.of == 0 {
		return true
	}
	sum := sha256.Sum256([]byte(key))
	return binary.BigEndian.Uint64(sum[:])%uint64(s.of) == uint64(s.number-1)
}
