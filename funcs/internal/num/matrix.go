package num

import "gonum.org/v1/gonum/mat"

// SmallestEigenvalue is the smallest eigenvalue of the symmetric matrix of n
// rows whose entries stand row by row in a; entries below the diagonal are not
// read. Its error is a few n·1e-16 times the largest eigenvalue. ok is false
// where the iteration does not end.
func SmallestEigenvalue(a []float64, n int) (value float64, ok bool) {
	if n < 1 || len(a) != n*n {
		return 0, false
	}
	var eigen mat.EigenSym
	if !eigen.Factorize(mat.NewSymDense(n, a), false) {
		return 0, false
	}
	return eigen.Values(nil)[0], true
}
