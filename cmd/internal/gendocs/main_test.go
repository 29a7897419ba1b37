package main

import "testing"

func TestTheGeneratedPagesAreUpToDate(t *testing.T) {
	stale, err := renew("../../..", true)
	if err != nil {
		t.Fatal(err)
	}
	if len(stale) > 0 {
		t.Errorf("out of date: %v; run: go run ./cmd/internal/gendocs", stale)
	}
}
