package rpc

import (
	"os"
	"strings"
	"testing"
)

// The configuration that the README shows is the one that is run.
func TestTheReadmeShowsTheConfigurationThatIsRun(t *testing.T) {
	config, err := os.ReadFile("../testdata/clients/nvim/halfwidth.lua")
	if err != nil {
		t.Fatal(err)
	}
	readme, err := os.ReadFile("../README.md")
	if err != nil {
		t.Fatal(err)
	}
	plain := func(text []byte) string { return strings.ReplaceAll(string(text), "\r\n", "\n") }
	var shown strings.Builder
	for line := range strings.Lines(plain(config)) {
		shown.WriteString("    " + line)
	}
	if !strings.Contains(plain(readme), "\n\n"+shown.String()+"\n") {
		t.Errorf("README.md does not show testdata/clients/nvim/halfwidth.lua:\n%s", shown.String())
	}
}
