package dist

import (
	"math"
	"math/big"
	"testing"
)

// The rows were computed at 60 digits with two formulas each; see
// testdata/references/numerics/README.md.
func TestCentralLawsReproduceHighPrecisionRows(t *testing.T) {
	values := map[string]func(arg func(string) float64) float64{
		"normal_cdf":                func(v func(string) float64) float64 { return Normal{}.CDF(v("z")) },
		"normal_sf":                 func(v func(string) float64) float64 { return Normal{}.SF(v("z")) },
		"normal_quantile":           func(v func(string) float64) float64 { return Normal{}.Quantile(v("p")) },
		"normal_interval":           func(v func(string) float64) float64 { return Normal{}.Between(v("a"), v("b")) },
		"student_t_cdf":             func(v func(string) float64) float64 { return Student{v("df")}.CDF(v("t")) },
		"student_t_sf":              func(v func(string) float64) float64 { return Student{v("df")}.SF(v("t")) },
		"student_t_quantile":        func(v func(string) float64) float64 { return Student{v("df")}.Quantile(v("p")) },
		"chi_square_cdf":            func(v func(string) float64) float64 { return ChiSquare{v("df")}.CDF(v("x")) },
		"chi_square_sf":             func(v func(string) float64) float64 { return ChiSquare{v("df")}.SF(v("x")) },
		"chi_square_quantile":       func(v func(string) float64) float64 { return ChiSquare{v("df")}.Quantile(v("p")) },
		"chi_square_upper_quantile": func(v func(string) float64) float64 { return ChiSquare{v("df")}.UpperQuantile(v("q")) },
		"f_cdf":                     func(v func(string) float64) float64 { return F{v("df1"), v("df2")}.CDF(v("x")) },
		"f_sf":                      func(v func(string) float64) float64 { return F{v("df1"), v("df2")}.SF(v("x")) },
		"f_quantile":                func(v func(string) float64) float64 { return F{v("df1"), v("df2")}.Quantile(v("p")) },
		"f_upper_quantile":          func(v func(string) float64) float64 { return F{v("df1"), v("df2")}.UpperQuantile(v("q")) },
		"reg_inc_beta":              func(v func(string) float64) float64 { return Beta{v("a"), v("b")}.CDF(v("x")) },
		"reg_inc_beta_complement":   func(v func(string) float64) float64 { return Beta{v("a"), v("b")}.SF(v("x")) },
		"reg_inc_beta_inverse":      func(v func(string) float64) float64 { return Beta{v("a"), v("b")}.Quantile(v("p")) },
		"reg_gamma_p":               func(v func(string) float64) float64 { return Gamma{v("a")}.CDF(v("x")) },
		"reg_gamma_q":               func(v func(string) float64) float64 { return Gamma{v("a")}.SF(v("x")) },
		"reg_gamma_p_inverse":       func(v func(string) float64) float64 { return Gamma{v("a")}.Quantile(v("p")) },
		"reg_gamma_q_inverse":       func(v func(string) float64) float64 { return Gamma{v("a")}.UpperQuantile(v("q")) },
	}
	// The worst row is at 9e-15.
	const tolerance = 3e-14
	for _, file := range []string{"normal.csv", "student_t.csv", "chi_square.csv", "f.csv", "reg_inc_beta.csv", "reg_inc_gamma.csv"} {
		worst := 0.0
		for _, r := range highPrecisionRows(t, file) {
			f, ok := values[r.function()]
			if !ok {
				t.Fatalf("%s: no function %s", file, r.function())
			}
			want, _, err := big.ParseFloat(r["value"], 10, 200, big.ToNearestEven)
			if err != nil {
				t.Fatal(err)
			}
			got := f(func(name string) float64 { return r.number(t, name) })
			e := math.Abs(relative(got, want))
			if !(e <= tolerance) {
				t.Errorf("%s: %v: got %v, relative error %.2g", file, r, got, e)
			}
			worst = max(worst, e)
		}
		t.Logf("%s: largest relative error %.2g", file, worst)
	}
}
