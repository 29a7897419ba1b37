package workbook

import (
	"context"
	"fmt"
	"slices"
	"sync"

	"halfwidth/funcs"
)

// tripsSheet is the data sheet of a starter, so that expressions can be seen at
// work: invented trips of the carrier Larkmoor Parcels.
const tripsSheet = "Trips"

var tripColumns = []string{"trip", "depot", "planned", "minutes", "parcels", "damaged"}

type trip struct {
	number           int
	depot            string
	planned, minutes float64
	parcels          int
	damaged          string
}

// larkmoorTrips lists the invented trips, those of the depots in turn.
var larkmoorTrips = sync.OnceValue(func() []trip {
	const each = 10
	depots := []struct {
		name             string
		planned, minutes [each]float64
		parcels          [each]int
		damaged          [each]bool
	}{
		{"North", [each]float64{30, 32, 28, 34, 30, 31, 27, 33, 29, 36}, [each]float64{31.5, 30.2, 29.1, 37.4, 33.0, 28.6, 26.9, 36.1, 32.3, 35.4},
			[each]int{22, 25, 18, 31, 24, 20, 17, 29, 23, 30}, [each]bool{3: true, 7: true, 8: true}},
		{"Quay", [each]float64{28, 30, 26, 29, 31, 27, 25, 30, 28, 32}, [each]float64{26.4, 30.9, 27.2, 25.1, 31.8, 28.3, 23.7, 27.9, 29.6, 30.1},
			[each]int{19, 24, 17, 20, 26, 21, 15, 22, 23, 25}, [each]bool{4: true, 9: true}},
		{"Mill", [each]float64{33, 35, 31, 36, 32, 34, 30, 37, 33, 35}, [each]float64{36.2, 33.8, 30.5, 40.1, 34.9, 31.7, 32.6, 38.4, 29.9, 37.3},
			[each]int{27, 29, 21, 34, 26, 24, 23, 33, 20, 31}, [each]bool{0: true, 3: true, 5: true, 7: true}},
		{"Fell", [each]float64{36, 38, 34, 40, 35, 37, 33, 41, 36, 39}, [each]float64{34.8, 41.6, 36.9, 43.2, 33.1, 39.7, 35.5, 45.0, 38.2, 40.4},
			[each]int{18, 26, 20, 30, 16, 25, 19, 33, 22, 28}, [each]bool{7: true}},
	}
	var list []trip
	for i := range each {
		for d, depot := range depots {
			damaged := "no"
			if depot.damaged[i] {
				damaged = "yes"
			}
			list = append(list, trip{101 + i*len(depots) + d, depot.name, depot.planned[i], depot.minutes[i], depot.parcels[i], damaged})
		}
	}
	return list
})

// seen is an expression over the trips, and the value that it stands for.
type seen struct {
	text  string
	value any
}

// seenFor gives an expression over the trips for an input, by its name, which
// means the same wherever it is taken, and its kind; false where no trip says
// anything of the input. paired asks for two values of the same rows.
func seenFor(in funcs.Input, paired bool) (seen, bool) {
	first, second := "North", "Quay"
	switch {
	case in.Kind == funcs.Sample && in.Name == "sample":
		return column("minutes", first), true
	case in.Kind == funcs.Sample && in.Name == "second-sample" && paired:
		return column("planned", first), true
	case in.Kind == funcs.Sample && in.Name == "second-sample":
		return column("minutes", second), true
	case in.Kind == funcs.Samples:
		return byDepot("minutes"), true
	case in.Kind == funcs.Numbers && in.Name == "successes":
		return eachDepot("count in Trips where damaged = yes for each depot", isDamaged), true
	case in.Kind == funcs.Numbers && in.Name == "ns":
		return eachDepot("count in Trips for each depot", func(trip) float64 { return 1 }), true
	case in.Kind == funcs.Numbers && in.Name == "sizes":
		return eachDepot("sum of parcels in Trips for each depot", parcels), true
	}
	if in.Kind != funcs.Count && in.Kind != funcs.Number {
		return seen{}, false
	}
	switch in.Name {
	case "n", "first-n":
		return total("count", "", first, func(trip) float64 { return 1 }), true
	case "second-n":
		return total("count", "", second, func(trip) float64 { return 1 }), true
	case "successes", "count", "first-successes", "first-count":
		return total("count", " and damaged = yes", first, isDamaged), true
	case "second-successes", "second-count":
		return total("count", " and damaged = yes", second, isDamaged), true
	case "exposure", "first-exposure":
		return total("sum of parcels", "", first, parcels), true
	case "second-exposure":
		return total("sum of parcels", "", second, parcels), true
	}
	return seen{}, false
}

func parcels(t trip) float64 { return float64(t.parcels) }

func isDamaged(t trip) float64 {
	if t.damaged == "yes" {
		return 1
	}
	return 0
}

func (t trip) column(name string) float64 {
	if name == "planned" {
		return t.planned
	}
	return t.minutes
}

func column(name, depot string) seen {
	var values []float64
	for _, t := range larkmoorTrips() {
		if t.depot == depot {
			values = append(values, t.column(name))
		}
	}
	return seen{fmt.Sprintf("%s in %s where depot = %s", name, tripsSheet, depot), values}
}

func byDepot(name string) seen {
	var groups []funcs.Group
	for _, depot := range depotNames() {
		groups = append(groups, funcs.Group{Name: depot, Values: column(name, depot).value.([]float64)})
	}
	return seen{fmt.Sprintf("%s in %s for each depot", name, tripsSheet), groups}
}

// depotNames lists the depots as groups are ordered.
func depotNames() []string {
	var names []string
	for _, t := range larkmoorTrips() {
		names = append(names, t.depot)
	}
	slices.Sort(names)
	return slices.Compact(names)
}

func eachDepot(text string, of func(trip) float64) seen {
	list := funcs.List{}
	for _, depot := range depotNames() {
		list.Names = append(list.Names, depot)
		list.Values = append(list.Values, total("", "", depot, of).value.(float64))
	}
	return seen{text, list}
}

func total(what, condition, depot string, of func(trip) float64) seen {
	var sum float64
	for _, t := range larkmoorTrips() {
		if t.depot == depot {
			sum += of(t)
		}
	}
	return seen{fmt.Sprintf("%s in %s where depot = %s%s", what, tripsSheet, depot, condition), sum}
}

// overTrips gives the cells of a row that asks a function about the trips, by
// input, and what it answers; nothing where the trips say nothing that the
// function can use. What they do not say is taken from the function's example.
func overTrips(ctx context.Context, f *funcs.Function) (map[string]any, *funcs.Outcome, error) {
	cells, args := map[string]any{}, map[string]any{}
	var found bool
	for _, in := range f.Inputs {
		if !wantedOverTrips(f, in) {
			continue
		}
		if s, ok := seenFor(in, f.Paired); ok {
			cells[in.Name], args[in.Name], found = s.text, s.value, true
			continue
		}
		i := slices.IndexFunc(f.Example.Arguments, func(a funcs.Argument) bool { return a.Name == in.Name })
		switch {
		case in.Kind == funcs.Text:
			cells[in.Name], args[in.Name] = depotNames()[0], depotNames()[0]
		case i >= 0:
			cells[in.Name], args[in.Name] = f.Example.Arguments[i].Value, f.Example.Arguments[i].Value
		case f.Required(in.Name):
			return nil, nil, nil
		}
	}
	if !found {
		return nil, nil, nil
	}
	out, err := f.Answer(ctx, args)
	if ctx.Err() != nil {
		return nil, nil, ctx.Err()
	}
	if err != nil || out.Status == funcs.StatusRefused {
		return nil, nil, nil
	}
	return cells, out, nil
}

// wantedOverTrips tells which inputs a row about the trips gives: those that no
// call does without, and of each choice of ways the first, whole.
func wantedOverTrips(f *funcs.Function, in funcs.Input) bool {
	inWays := false
	for _, one := range f.OneOf {
		for i, way := range one {
			if slices.Contains(way.Needs, in.Name) {
				if i == 0 {
					return true
				}
				inWays = true
			}
			inWays = inWays || slices.Contains(way.May, in.Name)
		}
	}
	_, counted := seenFor(in, f.Paired)
	return !inWays && (f.Required(in.Name) || in.Kind == funcs.Text || counted && !in.Optional)
}
