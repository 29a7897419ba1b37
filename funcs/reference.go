package funcs

import (
	"fmt"
	"io"
	"math"
	"strings"
)

// WriteReference writes a function's reference page as Markdown that reads well
// as plain text too. It is made from the descriptor alone.
func WriteReference(w io.Writer, f *Function) error {
	var b strings.Builder
	fmt.Fprintf(&b, "## %s\n\n%s.\n", f.Name, upperFirst(f.Summary))
	if len(f.OneOf) > 0 {
		b.WriteString("\n")
		for _, one := range f.OneOf {
			fmt.Fprintf(&b, "Give %s.\n", one)
		}
	}
	b.WriteString("\nInputs:\n\n")
	for _, in := range f.Inputs {
		fmt.Fprintf(&b, "- `%s` (%s%s): %s\n", in.Name, in.Kind, takes(in), in.Summary)
	}
	if len(f.Results) > 0 {
		b.WriteString("\nResults:\n\n")
		writeResults(&b, f.Results)
	}
	if len(f.Table) > 0 {
		b.WriteString("\nTable, a row each with its own status and note:\n\n")
		writeResults(&b, f.Table)
	}
	if len(f.Findings) > 0 {
		b.WriteString("\nFindings it can raise:\n\n")
		for _, k := range f.Findings {
			fmt.Fprintf(&b, "- `%s`: %s\n", k.Code, k.Meaning)
		}
	}
	if len(f.Assumptions) > 0 {
		fmt.Fprintf(&b, "\nAssumes: %s.\n", strings.Join(f.Assumptions, "; "))
	}
	fmt.Fprintf(&b, "\nMethod: %s.\n", strings.Join(f.Citations, "; "))
	fmt.Fprintf(&b, "\nExample (%s; values from %s):\n\n", f.Example.Label, f.Example.Source)
	for _, a := range f.Example.Arguments {
		fmt.Fprintf(&b, "    %s = %s\n", a.Name, FormatArgument(a.Value))
	}
	for _, a := range f.Example.Want {
		fmt.Fprintf(&b, "    > %s: %s\n", a.Name, FormatArgument(a.Value))
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// takes words domain, unit and default of an input.
func takes(in Input) string {
	text := ""
	if expects := in.Expects(); in.Kind != YesNo && in.Kind != Text && expects != anyNumber.String() {
		text = "; " + expects
	}
	if in.Most > 0 && in.Kind == Samples {
		text += "; at most " + in.howMany(in.Most)
	} else if in.Most > 0 {
		text += fmt.Sprintf("; at most %d of them", in.Most)
	}
	text += unitText(in.Unit)
	switch {
	case in.Default != nil:
		text += "; default " + FormatArgument(in.Default)
	case in.Optional:
		text += "; may be left out"
	}
	return text
}

// howMany words a number of what the list holds.
func (in Input) howMany(n int) string {
	if in.Kind == Samples {
		return plural(n, "group")
	}
	return plural(n, "number")
}

func unitText(u Unit) string {
	switch u {
	case SameUnit:
		return "; unit of the sample"
	case SquaredUnit:
		return "; unit of the sample, squared"
	}
	return ""
}

func writeResults(b *strings.Builder, list []Result) {
	for _, r := range list {
		fmt.Fprintf(b, "- `%s` (%s%s): %s\n", r.Name, r.Kind, unitText(r.Unit), r.Summary)
	}
}

// FormatArgument writes a value as it is written in a sheet's cell or on a
// command line.
func FormatArgument(value any) string {
	switch v := value.(type) {
	case float64:
		if math.IsInf(v, 1) {
			return Infinite
		}
		return FormatNumber(v)
	case bool:
		return show(v)
	case []float64:
		return formatNumbers(nil, v)
	case List:
		return formatNumbers(v.Names, v.Values)
	case []Group:
		parts := make([]string, len(v))
		for i, g := range v {
			parts[i] = fmt.Sprintf("%s = %s", g.Name, formatNumbers(nil, g.Values))
		}
		return strings.Join(parts, " | ")
	case From:
		return FormatArgument(v.Value)
	}
	return fmt.Sprint(value)
}

func formatNumbers(names []string, values []float64) string {
	parts := make([]string, len(values))
	for i, x := range values {
		if !math.IsNaN(x) {
			parts[i] = FormatNumber(x)
		}
		if names != nil {
			parts[i] = names[i] + " = " + parts[i]
		}
	}
	return strings.Join(parts, "; ")
}

func upperFirst(s string) string { return strings.ToUpper(s[:1]) + s[1:] }
