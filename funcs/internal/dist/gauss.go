package dist

// Nodes and weights of the Gauss-Legendre rule of 16 points on (-1, 1), the
// positive half: roots of the Legendre polynomial to 19 digits.
var gaussNodes, gaussWeights = [8]float64{
	0.9894009349916499326, 0.9445750230732325761,
	0.8656312023878317439, 0.7554044083550030339,
	0.6178762444026437484, 0.4580167776572273863,
	0.2816035507792589132, 0.09501250983763744019,
}, [8]float64{
	0.02715245941175409485, 0.06225352393864789286,
	0.09515851168249278481, 0.1246289712555338721,
	0.1495959888165767321, 0.1691565193950025382,
	0.1826034150449235889, 0.1894506104550684963,
}

// gauss16 integrates f from a to b by one Gauss-Legendre rule of 16 points.
func gauss16(f func(float64) float64, a, b float64) float64 {
	middle, half := a/2+b/2, b/2-a/2
	sum := 0.0
	for i, x := range gaussNodes {
		d := float64(half * x)
		sum += float64(gaussWeights[i] * (f(middle-d) + f(middle+d)))
	}
	return sum * half
}
