package funcs

// The kinds of interval of a proportion.
const (
	wilson     = "wilson"
	exactShare = "clopper-pearson"
)

var shareKind = choice("kind", "wilson: from the score test, near its confidence on average; clopper-pearson: exact, never below its confidence",
	wilson, exactShare)
