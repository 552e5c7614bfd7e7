package filter

// separate gives every channel's samples of the first frames of an interleaved
// buffer to a plane of its own.
func separate(planes [][]float64, interleaved []float64, frames int) {
	if len(planes) == 2 {
		left, right := planes[0][:frames], planes[1][:frames]
		for i := range left {
			pair := (*[2]float64)(interleaved[2*i:])
			left[i], right[i] = pair[0], pair[1]
		}
		return
	}
	for c, plane := range planes {
		for i := range plane[:frames] {
			plane[i] = interleaved[i*len(planes)+c]
		}
	}
}

// join interleaves so many frames of the planes, from one on.
func join(interleaved []float64, planes [][]float64, from, frames int) {
	if len(planes) == 2 {
		left, right := planes[0][from:][:frames], planes[1][from:][:frames]
		for i := range left {
			pair := (*[2]float64)(interleaved[2*i:])
			pair[0], pair[1] = left[i], right[i]
		}
		return
	}
	for c, plane := range planes {
		for i, v := range plane[from:][:frames] {
			interleaved[i*len(planes)+c] = v
		}
	}
}
