package rpc

import (
	"strings"
	"testing"
)

func TestTheTableIsSound(t *testing.T) {
	seen := map[string]bool{}
	for _, m := range Methods() {
		if seen[m.Name] {
			t.Errorf("%s stands twice", m.Name)
		}
		seen[m.Name] = true
		if m.Handler == nil {
			t.Errorf("%s has no handler", m.Name)
		}
		if !strings.HasSuffix(m.Doc, ".") || strings.Count(m.Doc, ".") != 1 {
			t.Errorf("%s is not told in one sentence: %q", m.Name, m.Doc)
		}
		if m.Long && m.Notification {
			t.Errorf("%s: notifications are run in turn, never by a worker", m.Name)
		}
		if m.Params != nil {
			for i := range m.Params.NumField() {
				if name, _ := fieldOf(m.Params.Field(i)); name == "" {
					t.Errorf("%s: the field %s has no name on the wire", m.Name, m.Params.Field(i).Name)
				}
			}
		}
	}
	for _, name := range []string{"initialize", "initialized", "shutdown", "exit", "$/cancelRequest", "$/setTrace"} {
		if !seen[name] {
			t.Errorf("%s is missing", name)
		}
	}
	if a, b := Methods(), Methods(); &a[0] == &b[0] {
		t.Error("two sessions share a table")
	}
}
