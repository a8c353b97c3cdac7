package figure

import (
	"cmp"
	"image"
	"image/color"
	"slices"
)

// fewColours returns the image with at most 256 colours, which PNG stores in a
// byte a pixel: a third of the size. A figure is made of a dozen colours and
// the blends at their edges; blends that look alike share the commonest of them,
// so the colours of the inks stay as they are.
func fewColours(img *image.RGBA) image.Image {
	bounds := img.Bounds()
	counts := map[color.RGBA]int{}
	eachRun(img, func(_, n int, c color.RGBA) { counts[c] += n })
	palette, index := paletteOf(counts)
	out := image.NewPaletted(bounds, palette)
	eachRun(img, func(start, n int, c color.RGBA) {
		group := index[c]
		for i := start; i < start+n; i++ {
			out.Pix[i] = group
		}
	})
	return out
}

// eachRun calls f with the start and length of each run of one colour, counting
// pixels row by row. Most of a figure is paper, so runs are long.
func eachRun(img *image.RGBA, f func(start, n int, c color.RGBA)) {
	width := img.Rect.Dx()
	for y := range img.Rect.Dy() {
		row := img.Pix[y*img.Stride : y*img.Stride+4*width]
		for x := 0; x < width; {
			pixel := [4]byte(row[4*x : 4*x+4])
			n := 1
			for x+n < width && [4]byte(row[4*(x+n):4*(x+n)+4]) == pixel {
				n++
			}
			f(y*width+x, n, color.RGBA{pixel[0], pixel[1], pixel[2], pixel[3]})
			x += n
		}
	}
}

// paletteOf groups colours by their leading bits, as many of them as give at
// most 256 groups, and returns the commonest colour of each group, and the group
// of each colour.
func paletteOf(counts map[color.RGBA]int) (color.Palette, map[color.RGBA]uint8) {
	colours := make([]color.RGBA, 0, len(counts))
	for c := range counts {
		colours = append(colours, c)
	}
	slices.SortFunc(colours, func(a, b color.RGBA) int {
		return cmp.Or(counts[b]-counts[a], int(a.R)-int(b.R), int(a.G)-int(b.G), int(a.B)-int(b.B), int(a.A)-int(b.A))
	})
	for dropped := 0; ; dropped++ {
		var palette color.Palette
		groups := map[color.RGBA]uint8{}
		index := make(map[color.RGBA]uint8, len(colours))
		for _, c := range colours {
			key := color.RGBA{c.R >> dropped, c.G >> dropped, c.B >> dropped, c.A >> dropped}
			group, ok := groups[key]
			if !ok {
				if len(palette) == 256 {
					break
				}
				group = uint8(len(palette))
				groups[key] = group
				palette = append(palette, c)
			}
			index[c] = group
		}
		if len(index) == len(colours) {
			return palette, index
		}
	}
}
