package page

import (
	"fmt"
	"image"
	"image/color"
)

// hexes are the colours of a scale for a browser, from low to high.
func hexes(colors color.Palette) []string {
	list := make([]string, len(colors)-1)
	for i := range list {
		r, g, b, _ := colors[i].RGBA()
		list[i] = fmt.Sprintf("#%02x%02x%02x", r>>8, g>>8, b>>8)
	}
	return list
}

func corners(r *image.Rectangle) []int {
	if r == nil {
		return nil
	}
	return []int{r.Min.X, r.Min.Y, r.Max.X, r.Max.Y}
}
