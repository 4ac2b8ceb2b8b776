package main

import (
	"bytes"
	"image"
	"image/color"
	"image/png"
	"strconv"
)

// The sign is the true square that stands for go, hung on its plumb line: ink on paper.
var (
	paper = color.RGBA{0xfb, 0xfa, 0xf5, 0xff}
	ink   = color.RGBA{0x14, 0x18, 0x1c, 0xff}
)

// addIcons draws the sign in the sizes that phones ask for and returns their names for the templates.
func addIcons(gen *folder) map[string]string {
	names := map[string]string{}
	for _, icon := range []struct {
		stem string
		size int
		// scale is the sign's part of the picture. A maskable icon may be cut to the circle of 80 % of its width
		// (W3C manifest, "safe zone"), so the sign has to fit inside that.
		scale float64
		phone bool
	}{
		{"icon-180", 180, 0.72, true}, // the size that iOS takes
		{"icon-192", 192, 0.72, true},
		{"icon-512", 512, 0.72, false},
		{"icon-maskable-512", 512, 0.54, false},
	} {
		url := gen.add(icon.stem, ".png", draw(icon.size, icon.scale), partIcon)
		names[icon.stem+".png"] = url
		gen.files[url[len("/gen/"):]].phone = icon.phone
	}
	return names
}

// draw paints the sign: a heavy square outline, its plumb line through the middle from the top, a bob at the end.
// Each pixel is the mean of 4 × 4 samples, so that edges are smooth at any size.
func draw(size int, scale float64) []byte {
	const samples = 4
	canvas := image.NewRGBA(image.Rect(0, 0, size, size))
	for y := range size {
		for x := range size {
			hits := 0
			for sy := range samples {
				for sx := range samples {
					u := ((float64(x)+(float64(sx)+0.5)/samples)/float64(size) - 0.5) / scale
					v := ((float64(y)+(float64(sy)+0.5)/samples)/float64(size) - 0.5) / scale
					if inSign(u, v) {
						hits++
					}
				}
			}
			canvas.SetRGBA(x, y, mix(paper, ink, float64(hits)/(samples*samples)))
		}
	}
	var out bytes.Buffer
	if err := png.Encode(&out, canvas); err != nil {
		panic("mkstatic: png of " + strconv.Itoa(size)) // a memory buffer takes all that is written
	}
	return out.Bytes()
}

// inSign takes −0.5 … 0.5 from left to right and top to bottom.
func inSign(u, v float64) bool {
	const outer, stroke, line = 0.5, 0.12, 0.025
	if abs(u) > outer || abs(v) > outer {
		return false
	}
	if abs(u) > outer-stroke || abs(v) > outer-stroke {
		return true
	}
	const bobTop, bobTip, bobHalf = 0.02, 0.26, 0.10
	if v < bobTop {
		return abs(u) < line
	}
	// the bob: a triangle that points down
	return v < bobTip && abs(u) < bobHalf*(bobTip-v)/(bobTip-bobTop)
}

func abs(x float64) float64 {
	if x < 0 {
		return -x
	}
	return x
}

func mix(a, b color.RGBA, share float64) color.RGBA {
	between := func(p, q uint8) uint8 { return uint8(float64(p) + (float64(q)-float64(p))*share + 0.5) }
	return color.RGBA{between(a.R, b.R), between(a.G, b.G), between(a.B, b.B), 0xff}
}
