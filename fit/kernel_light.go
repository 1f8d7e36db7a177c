package fit

// kernelLight is the light of a run of pixels, constants repeated over the lanes. The scale
// of the reference is k lane by lane in the first group and grows by step from group to
// group.
type kernelLight struct {
	k, step lanes
	sat     lanes // I/(a·Isat) of one count of the smooth reference
	pass    lanes // 1 − stray
	stray   lanes
	shot    lanes // variance of the reference: shot·smooth + read
	read    lanes
	dark    lanes // variance of the dark that both frames share
}

// The sums that a pass over pixels outside the room adds to, named by what is multiplied: r
// the residual, l the derivative by the light, g and h those by the density, and the power
// of X. They stand in groups that are totalled together.
const (
	passRR = iota
	passRL0
	passRL1
	passLL0
	passLL1
	passLL2
	passRG
	passRH0
	passRH1
	passRH2
	passGG
	passGH0
	passGH1
	passGH2
	passGL0
	passGL1
	passHL0
	passHL1
	passHL2
	passHL3
	passHH0
	passHH1
	passHH2
	passHH3
	passHH4
	numPass = (iota + kernelLanes - 1) / kernelLanes * kernelLanes
)

// passSums are the sums lane by lane, passTotals those over the lanes.
type (
	passSums   [numPass]lanes
	passTotals [numPass]float64
)

// parabola are the factors of X², X and 1.
type parabola [3]float64

func (p *parabola) add(q *parabola) {
	for i := range p {
		p[i] += q[i]
	}
}

// kernelShape are the factors of a derivative by one parameter along a row: g times a
// number, h and k times parabolas in X.
type kernelShape struct {
	g    float64
	h, k parabola
}

// productRows and productColumns are the size of a block of products.
const (
	productRows    = 3
	productColumns = 4
)

// productSums are the sums of the products of the rows and columns of a block.
type productSums [productRows * productColumns]lanes
