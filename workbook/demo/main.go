// Command demo writes the demo workbook of Larkmoor Parcels, an invented
// regional parcel carrier. The numbers come from a seeded generator, so that
// every run writes the same book; they serve the demonstration only.
//
//	go run ./workbook/demo testdata/workbooks/larkmoor.xlsx
package main

import (
	"archive/zip"
	"bytes"
	"cmp"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"time"

	"github.com/xuri/excelize/v2"
)

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: demo FILE.xlsx")
		os.Exit(2)
	}
	if err := write(os.Args[1]); err != nil {
		fmt.Fprintln(os.Stderr, "demo:", err)
		os.Exit(1)
	}
}

// book is the workbook under construction; the first error ends the work.
type book struct {
	*excelize.File
	bold, date int
	err        error
}

func (b *book) check(err error) {
	if b.err == nil {
		b.err = err
	}
}

func write(path string) error {
	b := &book{File: excelize.NewFile()}
	defer b.Close()
	var err error
	b.bold, err = b.NewStyle(&excelize.Style{Font: &excelize.Font{Bold: true}})
	b.check(err)
	iso := "yyyy-mm-dd"
	b.date, err = b.NewStyle(&excelize.Style{CustomNumFmt: &iso})
	b.check(err)

	b.check(b.SetSheetName("Sheet1", "Calculations"))
	for _, name := range []string{"Trips", "Routes", "Costs"} {
		_, err := b.NewSheet(name)
		b.check(err)
	}
	b.trips()
	b.routes()
	b.costs()
	b.calculations()
	b.check(b.SetDocProps(&excelize.DocProperties{Creator: "Larkmoor Parcels", Title: "Trips, routes and costs",
		Created: "2026-06-01T08:00:00Z", Modified: "2026-06-01T08:00:00Z"}))
	b.check(b.SetAppProps(&excelize.AppProperties{Application: "halfwidth demo"}))
	buffer, err := b.WriteToBuffer()
	b.check(err)
	if b.err != nil {
		return b.err
	}
	packed, err := inOrder(buffer.Bytes())
	if err != nil {
		return err
	}
	return os.WriteFile(path, packed, 0o644)
}

// inOrder puts the parts of a package in the order of their names, the content
// types first, since the library writes them in a different order each time.
func inOrder(packed []byte) ([]byte, error) {
	in, err := zip.NewReader(bytes.NewReader(packed), int64(len(packed)))
	if err != nil {
		return nil, err
	}
	slices.SortFunc(in.File, func(a, b *zip.File) int {
		return cmp.Or(-cmp.Compare(rank(a.Name), rank(b.Name)), cmp.Compare(a.Name, b.Name))
	})
	var buffer bytes.Buffer
	out := zip.NewWriter(&buffer)
	for _, f := range in.File {
		if err := out.Copy(f); err != nil {
			return nil, err
		}
	}
	err = out.Close()
	return buffer.Bytes(), err
}

func rank(name string) int {
	if name == "[Content_Types].xml" {
		return 1
	}
	return 0
}

// header writes the first row of a sheet in bold and keeps it in view.
func (b *book) header(sheet string, names ...any) {
	b.check(b.SetSheetRow(sheet, "A1", &names))
	b.check(b.SetRowStyle(sheet, 1, 1, b.bold))
	b.check(b.SetPanes(sheet, &excelize.Panes{Freeze: true, YSplit: 1, TopLeftCell: "A2", ActivePane: "bottomLeft"}))
}

// depots have their own handling times (mean and sd in minutes).
var depots = []struct {
	name       string
	share      float64
	mean, sd   float64
	damageRate float64
}{
	{"North", 0.35, 31.5, 6.0, 0.020},
	{"Quay", 0.30, 28.5, 5.5, 0.015},
	{"Mill", 0.20, 33.0, 7.0, 0.035},
	{"Fell", 0.15, 36.5, 8.0, 0.030},
}

const trips = 2000

// trips is a sheet as a team keeps it: some minutes are missing, a few cells
// hold a remark instead of a number, and the delay is heavily skewed.
func (b *book) trips() {
	const sheet = "Trips"
	rng := rand.New(rand.NewPCG(20260105, 1))
	b.header(sheet, "trip", "depot", "shift", "date", "minutes", "parcels", "damaged", "delay (minutes)")
	first := time.Date(2026, time.January, 5, 0, 0, 0, 0, time.UTC)
	for i := range trips {
		pick, d := rng.Float64(), 0
		for d < len(depots)-1 && pick >= depots[d].share {
			pick -= depots[d].share
			d++
		}
		depot := depots[d]
		shift, extra := "day", 0.0
		if rng.Float64() < 0.4 {
			shift, extra = "night", -1.5
		}
		parcels := 8 + rng.IntN(35)
		var minutes any = math.Round((depot.mean+extra+depot.sd*rng.NormFloat64())*10) / 10
		switch u := rng.Float64(); {
		case u < 0.012:
			minutes = nil
		case u < 0.014:
			minutes = "see log"
		case u < 0.015:
			minutes = "n/a"
		}
		damaged := "no"
		if rng.Float64() < depot.damageRate*float64(parcels)/25 {
			damaged = "yes"
		}
		delay := math.Round(math.Exp(0.9+1.1*rng.NormFloat64())*10) / 10
		row := []any{10001 + i, depot.name, shift, first.AddDate(0, 0, i/17), minutes, parcels, damaged, delay}
		b.check(b.SetSheetRow(sheet, fmt.Sprintf("A%d", i+2), &row))
	}
	b.check(b.SetColWidth(sheet, "A", "H", 12))
	b.check(b.SetCellStyle(sheet, "D2", fmt.Sprintf("D%d", trips+1), b.date))
	shifts := excelize.NewDataValidation(true)
	shifts.SetSqref(fmt.Sprintf("C2:C%d", trips+1))
	b.check(shifts.SetDropList([]string{"day", "night"}))
	b.check(b.AddDataValidation(sheet, shifts))
	b.check(b.SetDefinedName(&excelize.DefinedName{Name: "first_week", RefersTo: "Trips!$A$1:$H$120"}))
}

// routes has the same routes before and after their stops were put in a new
// order.
func (b *book) routes() {
	const sheet = "Routes"
	rng := rand.New(rand.NewPCG(20260105, 2))
	b.header(sheet, "route", "depot", "before (minutes)", "after (minutes)")
	for i := range 48 {
		base := 142 + 18*rng.NormFloat64()
		before := math.Round(base + 5*rng.NormFloat64())
		after := math.Round(base - 4.5 + 5*rng.NormFloat64())
		row := []any{fmt.Sprintf("R%02d", i+1), depots[i%len(depots)].name, before, after}
		b.check(b.SetSheetRow(sheet, fmt.Sprintf("A%d", i+2), &row))
	}
	b.check(b.SetColWidth(sheet, "A", "D", 16))
}

// costs holds next week's cost lines, each as a lowest, likely and highest
// amount, and what the last quarter's weeks averaged.
func (b *book) costs() {
	const sheet = "Costs"
	b.header(sheet, "cost line", "lowest", "likely", "highest", "weekly mean", "weekly sd")
	for i, line := range [][]any{
		{"fuel", 11800, 13200, 16400, 13450, 820},
		{"drivers", 41000, 42500, 45500, 42900, 760},
		{"vehicle repair", 2100, 3400, 7900, 3900, 1350},
		{"tolls and permits", 1450, 1600, 1900, 1630, 95},
		{"temporary staff", 0, 2600, 6800, 2950, 1480},
		{"damage claims", 350, 900, 2600, 1140, 520},
	} {
		b.check(b.SetSheetRow(sheet, fmt.Sprintf("A%d", i+2), &line))
	}
	b.check(b.SetColWidth(sheet, "A", "F", 17))
}
