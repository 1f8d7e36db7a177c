package fit

//go:noescape
func absorb2(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func thin2(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func faint2(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func compare2(rr *lanes, w, e, t, a, b, s, v []float64, l *kernelLight)

//go:noescape
func bare2(sum *passSums, a, b, s, v []float64, l *kernelLight, line *kernelLine)

//go:noescape
func tilt2(s *passSums, w, e, g, h, c []float64, l *kernelLine)

//go:noescape
func lightCross2(s *passSums, w, g, h, c []float64, l *kernelLine)

//go:noescape
func lightPowers2(s *passSums, w, h, c []float64, l *kernelLine)

//go:noescape
func times2(dst, v, w []float64)

//go:noescape
func shape2(dst, g, h, k []float64, f *kernelShape, l *kernelLine)

//go:noescape
func smear2(dst, src []float64, at, step int, taps []float64)

//go:noescape
func products2(s *productSums, rows, columns []float64, stride, n int)

//go:noescape
func absorb512(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func thin512(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func faint512(t, c, d, g, h, s []float64, l *kernelLight)

//go:noescape
func compare512(rr *lanes, w, e, t, a, b, s, v []float64, l *kernelLight)

//go:noescape
func bare512(sum *passSums, a, b, s, v []float64, l *kernelLight, line *kernelLine)

//go:noescape
func tilt512(s *passSums, w, e, g, h, c []float64, l *kernelLine)

//go:noescape
func lightCross512(s *passSums, w, g, h, c []float64, l *kernelLine)

//go:noescape
func lightPowers512(s *passSums, w, h, c []float64, l *kernelLine)

//go:noescape
func times512(dst, v, w []float64)

//go:noescape
func shape512(dst, g, h, k []float64, f *kernelShape, l *kernelLine)

//go:noescape
func smear512(dst, src []float64, at, step int, taps []float64)

//go:noescape
func products512(s *productSums, rows, columns []float64, stride, n int)
