package fit

// sheet is a picture with a margin of sheetMargin pixels around it, in rows of whole groups with room to spare,
// for sums over neighbours.
type sheet struct {
	w, h, stride int
	v            []float64
}

const sheetMargin = 2

// size makes room for w×h pixels.
func (s *sheet) size(w, h int) {
	s.w, s.h, s.stride = w, h, groups(w)+kernelLanes
	s.v = growTo(s.v, s.stride*(h+2*sheetMargin)+kernelLanes)
}

// row is row j with what is beside it; j may lie in the margin. Its first pixel stands at
// sheetMargin.
func (s *sheet) row(j int) []float64 {
	return s.v[(j+sheetMargin)*s.stride : (j+sheetMargin+1)*s.stride]
}

// empty clears the margin.
func (s *sheet) empty() {
	for j := -sheetMargin; j < s.h+sheetMargin; j++ {
		row := s.row(j)
		if j < 0 || j >= s.h {
			clear(row)
			continue
		}
		clear(row[:sheetMargin])
		clear(row[sheetMargin+s.w:])
	}
}

// extend repeats the border in the margin.
func (s *sheet) extend() {
	for j := range s.h {
		row := s.row(j)
		for i := range sheetMargin {
			row[i] = row[sheetMargin]
		}
		last := row[sheetMargin+s.w-1]
		for i := sheetMargin + s.w; i < len(row); i++ {
			row[i] = last
		}
	}
	for j := 1; j <= sheetMargin; j++ {
		copy(s.row(-j), s.row(0))
		copy(s.row(s.h-1+j), s.row(s.h-1))
	}
}

// smear fills dst, which has whole groups, with the sums over the neighbours of row j by the
// taps of a symmetric kernel, taken along columns and rows.
func (s *sheet) smear(k *kernelSet, dst []float64, j int, taps []float64, scratch []float64) {
	k.smear(scratch[:s.stride], s.v, (j+sheetMargin)*s.stride, s.stride, taps)
	k.smear(dst, scratch, sheetMargin, 1, taps)
}
