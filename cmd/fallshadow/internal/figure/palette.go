package figure

import "image/color"

// Role is what a part of a figure stands for; it decides colour, dashes and shape, so that
// one role looks alike in all figures. Roles differ in lightness and in dashes or shape
// too, for eyes that do not tell the colours and for grey prints.
type Role int

// The roles.
const (
	Data   Role = iota // what was measured
	Second             // measured too, of another kind: open squares
	Third              // triangles
	Law1               // dashed grey: the simplest law
	Law2               // solid
	Law3               // dash-dotted
	Law4               // dotted
	Law5               // long dashes
	Ground             // faint grey behind what is not to be trusted
)

type look struct {
	color color.NRGBA
	dash  []float64 // points
	width float64   // of lines, points
}

// The colours are dark enough on white, and keep apart when red and green look alike.
var looks = map[Role]look{
	Data:   {color.NRGBA{0x14, 0x3d, 0x66, 0xff}, nil, 1},
	Second: {color.NRGBA{0x9c, 0x4a, 0x00, 0xff}, nil, 1},
	Third:  {color.NRGBA{0x00, 0x6b, 0x5b, 0xff}, nil, 1},
	Law1:   {color.NRGBA{0x55, 0x55, 0x55, 0xff}, []float64{4, 2.2}, 0.9},
	Law2:   {color.NRGBA{0xd2, 0x6a, 0x00, 0xff}, nil, 1.1},
	Law3:   {color.NRGBA{0x0f, 0x8a, 0x7a, 0xff}, []float64{5, 1.8, 1.2, 1.8}, 1.1},
	Law4:   {color.NRGBA{0x7a, 0x3b, 0x8f, 0xff}, []float64{1.2, 1.8}, 1.2},
	Law5:   {color.NRGBA{0x9b, 0x82, 0x14, 0xff}, []float64{8, 2.2}, 1},
	Ground: {color.NRGBA{0xa8, 0xa8, 0xa8, 0xff}, nil, 1},
}

// pale returns the colour mixed with white, for bands; opaque, since not every viewer
// handles transparency alike.
func pale(c color.NRGBA, part float64) color.NRGBA {
	mix := func(v uint8) uint8 { return uint8(255 - (255-float64(v))*part) }
	return color.NRGBA{mix(c.R), mix(c.G), mix(c.B), 255}
}
