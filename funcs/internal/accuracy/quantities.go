package main

import (
	"context"
	"fmt"
	"strconv"
	"strings"

	"halfwidth/funcs"
	"halfwidth/funcs/internal/dist"
)

// args reads the arguments of a reference row by name.
type args func(name string) float64

// quantity computes what a reference function names. text reads cells that hold
// no single number.
type quantity func(v args, text func(string) string) (float64, error)

// law makes a quantity of a value that needs no error.
func law(f func(v args) float64) quantity {
	return func(v args, _ func(string) string) (float64, error) { return f(v), nil }
}

// answer makes a quantity of one result of a function of the catalogue.
func answer(name, result string, arguments func(v args, text func(string) string) map[string]any) quantity {
	return func(v args, text func(string) string) (float64, error) {
		out, err := funcs.Answer(context.Background(), name, arguments(v, text))
		if err != nil {
			return 0, err
		}
		switch x, _ := out.Get(result); x := x.(type) {
		case float64:
			return x, nil
		case int:
			return float64(x), nil
		}
		return 0, fmt.Errorf("%s gives no %s: %s", name, result, funcs.Note(out.Findings))
	}
}

// sides words the number of rejection tails.
func sides(v args) string {
	if v("sides") == 1 {
		return "above"
	}
	return "either"
}

func one(v args, _ func(string) string) map[string]any {
	return map[string]any{"n": int(v("n")), "difference": v("diff"), "sd": v("sd"), "significance": v("alpha"), "direction": sides(v)}
}

func two(v args, _ func(string) string) map[string]any {
	return map[string]any{"n": int(v("n1")), "second-n": int(v("n2")), "difference": v("diff"), "first-sd": v("sd"), "second-sd": v("sd"),
		"significance": v("alpha"), "direction": sides(v), "variances": "pooled"}
}

func oneSize(v args, _ func(string) string) map[string]any {
	return map[string]any{"difference": v("diff"), "sd": v("sd"), "significance": v("alpha"), "power": v("power"), "direction": sides(v)}
}

func twoSize(v args, _ func(string) string) map[string]any {
	return map[string]any{"difference": v("diff"), "first-sd": v("sd"), "second-sd": v("sd"), "significance": v("alpha"), "power": v("power"),
		"direction": sides(v), "variances": "pooled", "allocation-ratio": v("ratio")}
}

func precision(v args, _ func(string) string) map[string]any {
	m := map[string]any{"sd": v("sd"), "half-width": v("half_width"), "confidence": v("conf")}
	if n := v("N"); n > 0 {
		m["population-size"] = int(n)
	}
	return m
}

func share(kind string) func(v args, _ func(string) string) map[string]any {
	return func(v args, _ func(string) string) map[string]any {
		return map[string]any{"successes": int(v("x")), "n": int(v("n")), "confidence": v("conf"), "kind": kind}
	}
}

func shares(v args, _ func(string) string) map[string]any {
	return map[string]any{"first-successes": int(v("x1")), "first-n": int(v("n1")), "second-successes": int(v("x2")), "second-n": int(v("n2")), "confidence": v("conf")}
}

func events(v args, _ func(string) string) map[string]any {
	return map[string]any{"count": int(v("x")), "confidence": v("conf")}
}

func equivalence(design string) func(v args, _ func(string) string) map[string]any {
	return func(v args, _ func(string) string) map[string]any {
		m := map[string]any{"difference": v("diff"), "sd": v("sd"), "lower-margin": v("lower"), "upper-margin": v("upper"), "significance": v("alpha"), "design": design}
		switch {
		case v("power") > 0:
			m["power"] = v("power")
		case design == "one-sample":
			m["n"] = int(v("n"))
		default:
			m["n"], m["second-n"] = int(v("n1")), int(v("n2"))
		}
		return m
	}
}

func severalMeans(v args, text func(string) string) map[string]any {
	var means []float64
	for _, word := range strings.Fields(text("means")) {
		x, err := strconv.ParseFloat(word, 64)
		if err != nil {
			panic(err) // the reference file is ours
		}
		means = append(means, x)
	}
	return map[string]any{"means": means, "sd": v("sd"), "n": int(v("n_per_group")), "significance": v("alpha")}
}

// distribution makes a law of a row's arguments.
type distribution func(v args) dist.Distribution

var (
	normal      distribution = func(v args) dist.Distribution { return dist.Normal{} }
	student     distribution = func(v args) dist.Distribution { return dist.Student{DF: v("df")} }
	chiSquare   distribution = func(v args) dist.Distribution { return dist.ChiSquare{DF: v("df")} }
	fisher      distribution = func(v args) dist.Distribution { return dist.F{DF1: v("df1"), DF2: v("df2")} }
	beta        distribution = func(v args) dist.Distribution { return dist.Beta{A: v("a"), B: v("b")} }
	gamma       distribution = func(v args) dist.Distribution { return dist.Gamma{Shape: v("a")} }
	noncentralT distribution = func(v args) dist.Distribution {
		return dist.NoncentralT{DF: v("df"), Noncentrality: v("delta")}
	}
	noncentralChiSquare distribution = func(v args) dist.Distribution {
		return dist.NoncentralChiSquare{DF: v("df"), Noncentrality: v("lambda")}
	}
	noncentralF distribution = func(v args) dist.Distribution {
		return dist.NoncentralF{DF1: v("df1"), DF2: v("df2"), Noncentrality: v("lambda")}
	}
)

// interval is P(lo <= X <= hi).
func (d distribution) interval() quantity {
	return law(func(v args) float64 { return d(v).Between(v("lo"), v("hi")) })
}

func (d distribution) quantile() quantity {
	return law(func(v args) float64 { return d(v).Quantile(v("p")) })
}

func (d distribution) upperQuantile() quantity {
	return law(func(v args) float64 { return d(v).UpperQuantile(v("q")) })
}

// quantities says how each function of the reference files is computed here.
var quantities = map[string]quantity{
	"normal_cdf":                law(func(v args) float64 { return dist.Normal{}.CDF(v("z")) }),
	"normal_sf":                 law(func(v args) float64 { return dist.Normal{}.SF(v("z")) }),
	"normal_quantile":           law(func(v args) float64 { return dist.Normal{}.Quantile(v("p")) }),
	"normal_interval":           law(func(v args) float64 { return dist.Normal{}.Between(v("a"), v("b")) }),
	"student_t_cdf":             law(func(v args) float64 { return dist.Student{DF: v("df")}.CDF(v("t")) }),
	"student_t_sf":              law(func(v args) float64 { return dist.Student{DF: v("df")}.SF(v("t")) }),
	"student_t_quantile":        law(func(v args) float64 { return dist.Student{DF: v("df")}.Quantile(v("p")) }),
	"chi_square_cdf":            law(func(v args) float64 { return dist.ChiSquare{DF: v("df")}.CDF(v("x")) }),
	"chi_square_sf":             law(func(v args) float64 { return dist.ChiSquare{DF: v("df")}.SF(v("x")) }),
	"chi_square_quantile":       law(func(v args) float64 { return dist.ChiSquare{DF: v("df")}.Quantile(v("p")) }),
	"chi_square_upper_quantile": law(func(v args) float64 { return dist.ChiSquare{DF: v("df")}.UpperQuantile(v("q")) }),
	"f_cdf":                     law(func(v args) float64 { return dist.F{DF1: v("df1"), DF2: v("df2")}.CDF(v("x")) }),
	"f_sf":                      law(func(v args) float64 { return dist.F{DF1: v("df1"), DF2: v("df2")}.SF(v("x")) }),
	"f_quantile":                law(func(v args) float64 { return dist.F{DF1: v("df1"), DF2: v("df2")}.Quantile(v("p")) }),
	"f_upper_quantile":          law(func(v args) float64 { return dist.F{DF1: v("df1"), DF2: v("df2")}.UpperQuantile(v("q")) }),
	"reg_inc_beta":              law(func(v args) float64 { return dist.Beta{A: v("a"), B: v("b")}.CDF(v("x")) }),
	"reg_inc_beta_complement":   law(func(v args) float64 { return dist.Beta{A: v("a"), B: v("b")}.SF(v("x")) }),
	"reg_inc_beta_inverse":      law(func(v args) float64 { return dist.Beta{A: v("a"), B: v("b")}.Quantile(v("p")) }),
	"reg_gamma_p":               law(func(v args) float64 { return dist.Gamma{Shape: v("a")}.CDF(v("x")) }),
	"reg_gamma_q":               law(func(v args) float64 { return dist.Gamma{Shape: v("a")}.SF(v("x")) }),
	"reg_gamma_p_inverse":       law(func(v args) float64 { return dist.Gamma{Shape: v("a")}.Quantile(v("p")) }),
	"reg_gamma_q_inverse":       law(func(v args) float64 { return dist.Gamma{Shape: v("a")}.UpperQuantile(v("q")) }),
	"noncentral_t_cdf":          law(func(v args) float64 { return dist.NoncentralT{DF: v("df"), Noncentrality: v("delta")}.CDF(v("t")) }),
	"noncentral_t_sf":           law(func(v args) float64 { return dist.NoncentralT{DF: v("df"), Noncentrality: v("delta")}.SF(v("t")) }),
	"noncentral_chi_square_cdf": law(func(v args) float64 {
		return dist.NoncentralChiSquare{DF: v("df"), Noncentrality: v("lambda")}.CDF(v("x"))
	}),
	"noncentral_chi_square_sf": law(func(v args) float64 {
		return dist.NoncentralChiSquare{DF: v("df"), Noncentrality: v("lambda")}.SF(v("x"))
	}),
	"noncentral_f_cdf": law(func(v args) float64 {
		return dist.NoncentralF{DF1: v("df1"), DF2: v("df2"), Noncentrality: v("lambda")}.CDF(v("x"))
	}),
	"noncentral_f_sf": law(func(v args) float64 {
		return dist.NoncentralF{DF1: v("df1"), DF2: v("df2"), Noncentrality: v("lambda")}.SF(v("x"))
	}),
	"studentized_range_cdf":      law(func(v args) float64 { return dist.StudentizedRange{Groups: int(v("k")), DF: v("df")}.CDF(v("q")) }),
	"studentized_range_sf":       law(func(v args) float64 { return dist.StudentizedRange{Groups: int(v("k")), DF: v("df")}.SF(v("q")) }),
	"studentized_range_quantile": law(func(v args) float64 { return dist.StudentizedRange{Groups: int(v("k")), DF: v("df")}.Quantile(v("p")) }),
	"studentized_range_upper_quantile": law(func(v args) float64 {
		return dist.StudentizedRange{Groups: int(v("k")), DF: v("df")}.UpperQuantile(v("q"))
	}),
	"owens_t":                           law(func(v args) float64 { return dist.OwensT(v("h"), v("a")) }),
	"tolerance_k_two_sided":             law(func(v args) float64 { return dist.ToleranceFactor(int(v("n")), v("coverage"), v("confidence")) }),
	"tolerance_k_one_sided":             law(func(v args) float64 { return dist.OneSidedToleranceFactor(int(v("n")), v("coverage"), v("confidence")) }),
	"t_power_one_sample":                answer("mean-test-power", "attained-power", one),
	"t_power_two_sample":                answer("difference-test-power", "attained-power", two),
	"sample_size_t_one_sample":          answer("mean-test-size", "n", oneSize),
	"achieved_power_t_one_sample":       answer("mean-test-size", "attained-power", oneSize),
	"sample_size_t_two_sample_n1":       answer("difference-test-size", "n", twoSize),
	"achieved_power_t_two_sample":       answer("difference-test-size", "attained-power", twoSize),
	"sample_size_half_width":            answer("mean-precision-size", "n", precision),
	"achieved_half_width":               answer("mean-precision-size", "attained-half-width", precision),
	"anova_power":                       answer("several-means-power", "attained-power", severalMeans),
	"equivalence_power_one_sample":      answer("equivalence-power", "attained-power", equivalence("one-sample")),
	"equivalence_power_two_sample":      answer("equivalence-power", "attained-power", equivalence("two-samples")),
	"clopper_pearson_lower":             answer("proportion-interval", "lower", share("clopper-pearson")),
	"clopper_pearson_upper":             answer("proportion-interval", "upper", share("clopper-pearson")),
	"wilson_lower":                      answer("proportion-interval", "lower", share("wilson")),
	"wilson_upper":                      answer("proportion-interval", "upper", share("wilson")),
	"newcombe_difference_lower":         answer("proportion-difference-interval", "lower", shares),
	"newcombe_difference_upper":         answer("proportion-difference-interval", "upper", shares),
	"poisson_garwood_lower":             answer("rate-interval", "lower", events),
	"poisson_garwood_upper":             answer("rate-interval", "upper", events),
	"equivalence_sample_size_per_group": answer("equivalence-size", "n", equivalence("two-samples")),

	"normal_upper_quantile":                normal.upperQuantile(),
	"student_t_upper_quantile":             student.upperQuantile(),
	"student_t_interval":                   student.interval(),
	"chi_square_interval":                  chiSquare.interval(),
	"f_interval":                           fisher.interval(),
	"reg_inc_beta_interval":                beta.interval(),
	"reg_inc_beta_upper_inverse":           beta.upperQuantile(),
	"reg_gamma_interval":                   gamma.interval(),
	"noncentral_t_interval":                noncentralT.interval(),
	"noncentral_t_quantile":                noncentralT.quantile(),
	"noncentral_t_upper_quantile":          noncentralT.upperQuantile(),
	"noncentral_chi_square_interval":       noncentralChiSquare.interval(),
	"noncentral_chi_square_quantile":       noncentralChiSquare.quantile(),
	"noncentral_chi_square_upper_quantile": noncentralChiSquare.upperQuantile(),
	"noncentral_f_interval":                noncentralF.interval(),
	"noncentral_f_quantile":                noncentralF.quantile(),
	"noncentral_f_upper_quantile":          noncentralF.upperQuantile(),
}
