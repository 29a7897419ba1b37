package rpc

import (
	"bytes"
	"encoding/json"
	"os"
	"strings"
	"testing"
)

// The document that the server serves is the table of methods.
func TestTheDocumentHoldsEveryMethod(t *testing.T) {
	c := begin(t, Options{Methods: append(Methods(), Method{Name: "test/note", Doc: "Is a notification.", Notification: true, Handler: nothing})})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"rpc.discover"}`)
	r := c.reply()
	c.leave()
	type descriptor struct {
		Name, Description string
		Required          bool
		Schema            json.RawMessage
	}
	var document struct {
		OpenRPC string
		Info    struct{ Title, Version string }
		Methods []struct {
			Name, Summary, ParamStructure string
			Params                        []descriptor
			Result                        *descriptor
		}
	}
	if err := json.Unmarshal(r.Result, &document); err != nil {
		t.Fatal(err)
	}
	if document.OpenRPC != "1.3.2" || document.Info.Title != ServerName || document.Info.Version != "1" {
		t.Errorf("the document is %s of %+v", document.OpenRPC, document.Info)
	}
	described := document.Methods
	for _, m := range Methods() {
		if m.Standard {
			continue
		}
		if len(described) == 0 || described[0].Name != m.Name {
			t.Fatalf("%s is not described in its place", m.Name)
		}
		d := described[0]
		described = described[1:]
		if d.Summary != m.Doc || d.ParamStructure != "by-name" || m.Notification != (d.Result == nil) {
			t.Errorf("%s: %+v", m.Name, d)
		}
		fields := 0
		if m.Params != nil {
			fields = m.Params.NumField()
		}
		if len(d.Params) != fields {
			t.Fatalf("%s: %d params, want %d", m.Name, len(d.Params), fields)
		}
		for i, p := range d.Params {
			name, required := fieldOf(m.Params.Field(i))
			if p.Name != name || p.Required != required || p.Description == "" {
				t.Errorf("%s: %+v, want %s, required %v, and a description", m.Name, p, name, required)
			}
			compile(t, p.Schema)
		}
		if d.Result != nil {
			compile(t, d.Result.Schema)
			if m.Name == "rpc.discover" {
				validate(t, d.Result.Schema, r.Result)
			}
		}
	}
	if len(described) != 1 || described[0].Name != "test/note" || described[0].Result != nil {
		t.Errorf("more is described than there is: %+v", described)
	}
}

func TestTheCatalogueIsAnnounced(t *testing.T) {
	capabilities := map[string]any{"experimental": map[string]any{"halfwidth": map[string]any{}}}
	announceCatalogue(nil, capabilities)
	mark, _ := capabilities["experimental"].(map[string]any)["halfwidth"].(map[string]any)["catalogue"].(string)
	if len(mark) != 16 {
		t.Errorf("the catalogue's mark is %q", mark)
	}
}

// The document is committed, so that it can be read without a server.
// go test ./rpc -run OpenRPC -update renews it.
func TestTheOpenRPCDocumentIsThatOfTheCode(t *testing.T) {
	var table []*Method
	for _, m := range Methods() {
		table = append(table, &m)
	}
	var flat, want bytes.Buffer
	if err := encodeJSON(&flat, openRPC(table)); err != nil {
		t.Fatal(err)
	}
	if err := json.Indent(&want, flat.Bytes(), "", "\t"); err != nil {
		t.Fatal(err)
	}
	want.WriteByte('\n')
	const file = "openrpc.json"
	if *update {
		if err := os.WriteFile(file, want.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	got, err := os.ReadFile(file)
	if err != nil || strings.ReplaceAll(string(got), "\r\n", "\n") != want.String() {
		t.Errorf("rpc/%s is not that of the code (%v); run: go test ./rpc -run OpenRPC -update", file, err)
	}
}
