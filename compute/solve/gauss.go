package solve

// GaussNodes and GaussWeights are the positive nodes, and their weights, of the Gauss-Legendre rule of eight points on [-1, 1], exact for
// polynomials up to degree 15 (Abramowitz and Stegun 1964, table 25.4).
var (
	GaussNodes   = [4]float64{0.18343464249564980494, 0.52553240991632898582, 0.79666647741362673959, 0.96028985649753623168}
	GaussWeights = [4]float64{0.36268378337836198297, 0.31370664587788728734, 0.22238103445337447054, 0.10122853629037625915}
)
