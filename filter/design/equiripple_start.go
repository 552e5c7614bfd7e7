package design

import (
	"math"
	"slices"
	"sort"
)

// leja chooses the first reference: each next point is the one with the
// largest product of distances, in cos(omega), to those before. Such points
// spread over any set of bands as the extrema of good polynomials do, crowding
// at the edges and shared among the bands by more than width, and the
// polynomial through them swings little (Leja 1957; Bos, De Marchi, Sommariva &
// Vianello, SIAM J. Numer. Anal. 48 (2010) 1984-1999).
func (x *exchanger) leja() []gridPoint {
	products := make([]float64, len(x.grid))
	for i := range products {
		products[i] = 1
	}
	index := make([]int, x.spec.cosines()+1)
	index[0] = len(x.grid) - 1
	for k := 1; k < len(index); k++ {
		index[k] = x.farther(products, &x.grid[index[k-1]])
	}
	slices.Sort(index)
	return x.points(index)
}

// farther multiplies the distances to one more point in, returns where the
// product is largest, and scales the products to a largest of about 1.
func (x *exchanger) farther(products []float64, from *gridPoint) int {
	best := 0
	for i := range products {
		products[i] *= x.grid[i].distance(from)
		if products[i] > products[best] {
			best = i
		}
	}
	if largest := products[best]; largest < 1e-100 || largest > 1e100 {
		for i := range products {
			products[i] /= largest
		}
	}
	return best
}

// distance is twice the distance in cos(omega).
func (p *gridPoint) distance(q *gridPoint) float64 {
	if p.sin2 < 0.5 {
		return 4 * math.Abs(p.sin2-q.sin2)
	}
	return 4 * math.Abs(p.cos2-q.cos2)
}

// nearest moves a reference onto the grid.
func (x *exchanger) nearest(ref []gridPoint) []gridPoint {
	index := make([]int, len(ref))
	for i, p := range ref {
		index[i] = x.indexOf(p.omega)
	}
	for k := 1; k < len(index); k++ {
		index[k] = max(index[k], index[k-1]+1)
	}
	last := len(x.grid) - 1
	for k := len(index) - 1; k >= 0; k-- {
		index[k] = min(index[k], last)
		last = index[k] - 1
	}
	return x.points(index)
}

func (x *exchanger) indexOf(omega float64) int {
	i := sort.Search(len(x.grid), func(i int) bool { return x.grid[i].omega >= omega })
	if i == len(x.grid) || i > 0 && omega-x.grid[i-1].omega < x.grid[i].omega-omega {
		i--
	}
	return i
}

func (x *exchanger) points(index []int) []gridPoint {
	ref := make([]gridPoint, len(index))
	for k, i := range index {
		ref[k] = x.grid[i]
	}
	return ref
}
