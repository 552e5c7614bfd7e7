package audio

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestBendsAreKnown: of all pieces that a window loud enough reaches over, to
// the bit, whatever was there before.
func TestBendsAreKnown(t *testing.T) {
	const pieces, from, peak = 60, 5, 1.5
	r := rand.New(rand.NewPCG(11, 12))
	line := make([]float64, pieces*piece)
	for i := range line {
		line[i] = float64(r.IntN(2001)-1000) / 1024 // differences are exact
		if (i/50)%2 == 1 {
			line[i] /= 2
		}
	}
	s := newScanner(len(line))
	s.peak(line, math.Inf(1)) // sets the maxima
	for j := range s.bends {
		s.bends[j] = -1
	}
	s.collect(line, from, from+batch, peak)
	checked := 0
	for j := from; j < from+batch; j++ {
		if largest(line[j*piece:(j+windowPieces)*piece])*interpolator.norm <= peak {
			continue
		}
		for k := j; k < j+windowPieces; k++ {
			want := 0.
			for i := k * piece; i < (k+1)*piece; i++ {
				want = max(want, math.Abs(line[i]-2*line[i-1]+line[i-2]))
			}
			if s.bends[k] != want {
				t.Fatalf("piece %d: bend %v, want %v", k, s.bends[k], want)
			}
			checked++
		}
	}
	if checked == 0 || checked == batch*windowPieces {
		t.Fatalf("%d pieces loud enough: nothing to choose", checked)
	}
}

// TestCandidates: add takes exactly the windows whose g·x, by its definition, is
// above the limits. No g·x comes so near to them that 1e-14, for 6 products of
// samples up to 1, decides.
func TestCandidates(t *testing.T) {
	const middleLimit, sideLimit, doubt = 0.5, 0.6, 1e-14
	r := rand.New(rand.NewPCG(7, 8))
	line := make([]float64, piece*100)
	for i := range line {
		line[i] = 2*r.Float64() - 1
	}
	for from := 0; from+piece-1+interpolatorTaps <= len(line); from++ {
		s := newScanner(0)
		s.add(line, from, middleLimit, sideLimit)
		middles, sides := s.middle[:s.middles], s.side[:s.sides]
		for i := from; i < from+piece; i++ {
			x := window(line[i:])
			middle := math.Abs(dot(near(2./4), x))
			side := max(math.Abs(dot(near(1./4), x)), math.Abs(dot(near(3./4), x)))
			if !(math.Abs(middle-middleLimit) > doubt && math.Abs(side-sideLimit) > doubt) {
				t.Fatalf("a window at %d decides nothing: %g, %g", i, middle, side)
			}
			middles = takeFirst(t, middles, i, middle > middleLimit)
			sides = takeFirst(t, sides, i, side > sideLimit)
		}
		if len(middles) != 0 || len(sides) != 0 {
			t.Fatalf("piece at %d: %v and %v too many", from, middles, sides)
		}
	}
}

// takeFirst checks that list begins with v, if and only if it should, and takes it
// away.
func takeFirst(t *testing.T, list []int, v int, should bool) []int {
	t.Helper()
	if does := len(list) > 0 && list[0] == v; does != should {
		t.Fatalf("a window at %d is a candidate: %v, want %v", v, does, should)
	} else if does {
		return list[1:]
	}
	return list
}

func TestLargestAndBend(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	for n := range 40 {
		x := make([]float64, n)
		peak, bent := 0., 0.
		for i := range x {
			x[i] = float64(r.IntN(2001) - 1000) // whole numbers: differences are exact
			peak = max(peak, math.Abs(x[i]))
			if i >= 2 {
				bent = max(bent, math.Abs(x[i]-2*x[i-1]+x[i-2]))
			}
		}
		if got := largest(x); got != peak {
			t.Errorf("largest of %v: %v, want %v", x, got, peak)
		}
		if n == piece && largestSample((*[piece]float64)(x)) != peak {
			t.Errorf("largest sample of %v: want %v", x, peak)
		}
		if n == windowPieces && largestPiece((*[windowPieces]float64)(x)) != peak {
			t.Errorf("largest piece of %v: want %v", x, peak)
		}
		if n >= 2 && bend(x) != bent {
			t.Errorf("bend of %v: %v, want %v", x, bend(x), bent)
		}
	}
}
