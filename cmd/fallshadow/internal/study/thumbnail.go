package study

import (
	"context"
	"encoding/base64"
	"html/template"
	"image"
	"runtime"
	"sync"

	"fallshadow/cmd/fallshadow/internal/picture"
	"fallshadow/imageio"
)

// thumbnails draws shots small, by name, from the frames in the folder where they were
// fitted. A shot that cannot be read there has none.
func (n *Night) thumbnails(ctx context.Context, names []string) (map[string]template.URL, error) {
	layout := n.Settings.Layout()
	found, err := imageio.Scan(ctx, n.Root, layout)
	if err != nil {
		return nil, err
	}
	wanted := map[string]bool{}
	for _, name := range names {
		wanted[name] = true
	}
	var mu sync.Mutex
	list := map[string]template.URL{}
	var workers sync.WaitGroup
	next := make(chan imageio.Shot)
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			for s := range next {
				if uri := n.thumbnail(ctx, s, layout); uri != "" {
					mu.Lock()
					list[s.Name] = uri
					mu.Unlock()
				}
			}
		})
	}
	for _, s := range found.Shots {
		if wanted[s.Name] {
			next <- s
		}
	}
	close(next)
	workers.Wait()
	return list, ctx.Err()
}

// thumbnail draws one shot, nothing where it cannot be read.
func (n *Night) thumbnail(ctx context.Context, s imageio.Shot, layout imageio.Layout) (uri template.URL) {
	defer func() {
		if recover() != nil { // a fault in a reader must not cost the report
			uri = ""
		}
	}()
	raw, err := imageio.Read(ctx, n.Root, s, layout)
	if err != nil {
		return ""
	}
	img := picture.Frame(raw)
	if img == nil {
		return ""
	}
	drawn, err := dataURI(shrunk(img, thumbnailSide))
	if err != nil {
		return ""
	}
	return drawn
}

// thumbnailSide is the largest side of a thumbnail in pixels.
const thumbnailSide = 180

// shrunk returns the picture with blocks of pixels averaged until no side is longer. Its
// colours are a scale, so that indices can be averaged.
func shrunk(img *image.Paletted, side int) *image.Paletted {
	size := img.Rect.Size()
	b := (max(size.X, size.Y) + side - 1) / side
	if b <= 1 {
		return img
	}
	small := image.NewPaletted(image.Rect(0, 0, (size.X+b-1)/b, (size.Y+b-1)/b), img.Palette)
	for y := range small.Rect.Dy() {
		for x := range small.Rect.Dx() {
			sum, count := 0, 0
			for j := y * b; j < min((y+1)*b, size.Y); j++ {
				for i := x * b; i < min((x+1)*b, size.X); i++ {
					sum += int(img.Pix[j*img.Stride+i])
					count++
				}
			}
			small.Pix[y*small.Stride+x] = uint8(sum / count)
		}
	}
	return small
}

func dataURI(img image.Image) (template.URL, error) {
	png, err := picture.PNG(img)
	return template.URL("data:image/png;base64," + base64.StdEncoding.EncodeToString(png)), err
}
