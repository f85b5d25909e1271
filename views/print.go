package views

import (
	"bytes"
	"encoding/binary"
	"encoding/xml"
	"errors"
	"fmt"
	"hash/crc32"
	"image/color"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"
)

// Print is what a figure carries as a file, below its drawing.
type Print struct {
	Key      []KeyEntry
	Caption  string // could stand in a manuscript: rows, clusters, resamples, seed, release
	Settings string // the question in full, to get the figure again
	Invented int    // invented rows behind it: said in so many words
}

// KeyEntry is one entry of the key: a mark, a line, or a heading.
type KeyEntry struct {
	Text   string
	Point  *Point // its shape and class
	Line   string // class of a line
	Ribbon string // classes of a ribbon
	Head   bool
	Break  bool // starts a row
}

// The figures of a manuscript are one or two columns wide. All are lettered
// alike: a page unit is 0.52 pt at both widths, so 15 units are 7.9 pt.
const (
	singleMM    = 85.0
	doubleMM    = 175.0
	singleUnits = 460.0
	doubleUnits = singleUnits * doubleMM / singleMM
	pngDPI      = 300
)

// natural is the width a figure is drawn for when none is asked.
func (p Plot) natural() string {
	if p.Width > 0 && p.Width < 560 {
		return "single"
	}
	return "double"
}

// File is the figure as "svg", "png" (300 dpi) or "pdf", a "single" or "double"
// column wide ("" = as it is drawn on the page). All three are one drawing: the
// SVG, with its style in its elements, is what the other two are made of.
func (p Plot) File(kind, width string) ([]byte, error) {
	svg, err := p.printed(width)
	if err != nil {
		return nil, err
	}
	return fileOf(svg, kind)
}

// Standalone is the figure as an SVG of its own: the same drawing with its
// colours inside, on white, without links, with key and caption.
func (p Plot) Standalone() []byte {
	svg, err := p.printed("")
	if err != nil { // the markup is this package's own
		panic(err)
	}
	return svg
}

func (p Plot) printed(width string) ([]byte, error) {
	if width == "" {
		width = p.natural()
	}
	w, h := p.Width, p.Height
	if w <= 0 {
		w = 720
	}
	if h <= 0 {
		h = 440
	}
	p.Width = singleUnits
	if width == "double" {
		p.Width = doubleUnits
	}
	switch {
	case p.NoFrame: // as it is
		p.Height = p.Width * h / w
	case p.Left > 0: // rows of names: as tall as they are many
		p.Height = h
		p.Left = min(p.Left, 0.45*p.Width)
	case width == "double":
		p.Height = min(p.Width*h/w, 0.58*p.Width)
	default:
		p.Height = min(max(p.Width*h/w, 0.66*p.Width), 1.1*p.Width)
	}
	return styled(p.draw(true), printSheet)
}

// fileOf makes the other kinds of a styled SVG.
func fileOf(svg []byte, kind string) ([]byte, error) {
	switch kind {
	case "svg":
		return svg, nil
	case "png", "pdf":
	default:
		return nil, fmt.Errorf("no figure of kind %q", kind)
	}
	size, err := svgSize(svg)
	if err != nil {
		return nil, err
	}
	b := &brush{h: size.h, unit: float64(size.width) / size.w, x0: size.x, y0: size.y, clips: map[string]vg.Rectangle{}, paths: map[string]string{}}
	height := vg.Length(size.h * b.unit)
	var out bytes.Buffer
	if kind == "png" {
		c := vgimg.NewWith(vgimg.UseWH(size.width, height), vgimg.UseDPI(pngDPI), vgimg.UseBackgroundColor(color.White))
		b.c = c
		if err := b.draw(svg); err != nil {
			return nil, err
		}
		if _, err := (vgimg.PngCanvas{Canvas: c}).WriteTo(&out); err != nil {
			return nil, err
		}
		return withResolution(out.Bytes(), pngDPI), nil
	}
	c := newPDFCanvas(size.width, height, size.title, size.desc)
	b.c = c
	if err := b.draw(svg); err != nil {
		return nil, err
	}
	return c.bytes()
}

// withResolution writes the resolution into a PNG (pHYs chunk, after the
// header of 33 bytes), so that a text program places it at its width.
func withResolution(png []byte, dpi float64) []byte {
	const header = 33
	perMetre := uint32(dpi/0.0254 + 0.5)
	chunk := []byte("pHYs")
	chunk = binary.BigEndian.AppendUint32(chunk, perMetre)
	chunk = binary.BigEndian.AppendUint32(chunk, perMetre)
	chunk = append(chunk, 1) // the unit is the metre
	out := append([]byte{}, png[:header]...)
	out = binary.BigEndian.AppendUint32(out, uint32(len(chunk)-4))
	out = append(out, chunk...)
	out = binary.BigEndian.AppendUint32(out, crc32.ChecksumIEEE(chunk))
	return append(out, png[header:]...)
}

type figureSize struct {
	x, y, w, h  float64   // view box
	width       vg.Length // in print
	title, desc string
}

func svgSize(svg []byte) (figureSize, error) {
	d := xml.NewDecoder(bytes.NewReader(svg))
	for {
		t, err := d.Token()
		if err != nil {
			return figureSize{}, err
		}
		e, ok := t.(xml.StartElement)
		if !ok {
			continue
		}
		a := attributes(e)
		var s figureSize
		if n, _ := fmt.Sscan(a["viewBox"], &s.x, &s.y, &s.w, &s.h); n != 4 || !(s.w > 0 && s.h > 0) {
			return s, errors.New("a figure without a size")
		}
		s.width = vg.Length(a.num("width", 0)) * vg.Millimeter
		if s.width <= 0 {
			return s, errors.New("a figure without a width in print")
		}
		return s, s.named(d)
	}
}

// named reads the title and the description, which come first.
func (s *figureSize) named(d *xml.Decoder) error {
	for {
		t, err := d.Token()
		if err != nil {
			return err
		}
		e, ok := t.(xml.StartElement)
		if !ok {
			continue
		}
		switch e.Name.Local {
		case "title":
			s.title, err = innerText(d)
		case "desc":
			s.desc, err = innerText(d)
		default:
			return nil
		}
		if err != nil {
			return err
		}
	}
}

// Lettering below a figure, page units.
const (
	captionSize  = 14.0
	captionLead  = 18.0
	settingsSize = 11.5
	settingsLead = 14.5
	keyLead      = 21.0
	footGap      = 12.0
)

// foot is the key, the caption and the settings, set in lines.
type foot struct {
	markup string
	height float64
}

// newFoot sets what stands below a drawing of width w, from y down; left and
// right are kept free.
func newFoot(p Print, title string, w, y float64) foot {
	const side = 4.0
	var b strings.Builder
	put := func(parts ...string) {
		for _, s := range parts {
			b.WriteString(s)
		}
	}
	top := y
	if len(p.Key) > 0 {
		y += footGap
		y = drawKey(&b, p.Key, side, y, w-side)
	}
	caption := strings.TrimSpace(p.Caption)
	if p.Invented > 0 {
		caption = strings.TrimSpace(caption + " Invented data: " + countText(p.Invented, "row was", "rows were") + " drawn by a program; no conclusion about nature.")
	}
	if title != "" || caption != "" {
		y += footGap
		head := strings.TrimRight(title, ".")
		for _, line := range wrapTitled(head, caption, captionSize, w-2*side) {
			y += captionLead
			put(`<text class="caption`, line.class, `" x="`, num2(side), `" y="`, num2(y-4), `">`, esc(line.bold), `</text>`)
			if line.rest != "" {
				put(`<text class="caption" x="`, num2(side+line.at), `" y="`, num2(y-4), `">`, esc(line.rest), `</text>`)
			}
		}
	}
	if p.Settings != "" {
		y += 5
		for _, line := range wrapText(p.Settings, settingsSize, w-2*side, false) {
			y += settingsLead
			put(`<text class="settings" x="`, num2(side), `" y="`, num2(y-3), `">`, esc(line), `</text>`)
		}
	}
	if y > top {
		y += 4
	}
	return foot{b.String(), y - top}
}

// captionLine is one line of a caption: its first words may be bold.
type captionLine struct {
	bold, rest, class string
	at                float64 // where the rest begins
}

// wrapTitled sets a bold title and the text after it.
func wrapTitled(title, text string, size, width float64) []captionLine {
	var out []captionLine
	var lines []string
	if title != "" {
		if !strings.HasSuffix(title, "?") {
			title += "."
		}
		lines = wrapText(title, size, width, true)
	}
	for i, l := range lines {
		if i < len(lines)-1 {
			out = append(out, captionLine{bold: l, class: " bold"})
			continue
		}
		at := textWidth(l, size, true) + textWidth(" ", size, false)
		words := strings.Fields(text)
		n, rest := 0, ""
		for n < len(words) {
			next := strings.TrimSpace(rest + " " + words[n])
			if textWidth(next, size, false) > width-at {
				break
			}
			rest = next
			n++
		}
		out = append(out, captionLine{bold: l, class: " bold", rest: rest, at: at})
		text = strings.Join(words[n:], " ")
	}
	for _, l := range wrapText(text, size, width, false) {
		out = append(out, captionLine{bold: l})
	}
	return out
}

// wrapText breaks a text at its spaces into lines no wider than width; a word
// that is wider is broken where it must be.
func wrapText(text string, size, width float64, bold bool) []string {
	var out []string
	line := ""
	for _, word := range strings.Fields(text) {
		next := strings.TrimSpace(line + " " + word)
		if textWidth(next, size, bold) <= width {
			line = next
			continue
		}
		if line != "" {
			out = append(out, line)
		}
		for textWidth(word, size, bold) > width {
			r := []rune(word)
			k := len(r) - 1
			for k > 1 && textWidth(string(r[:k]), size, bold) > width {
				k--
			}
			out = append(out, string(r[:k]))
			word = string(r[k:])
		}
		line = word
	}
	if line != "" {
		out = append(out, line)
	}
	return out
}

// drawKey sets the entries of a key in rows and returns where it ends; a
// heading starts a row.
func drawKey(b *strings.Builder, key []KeyEntry, left, y, right float64) float64 {
	c := &canvas{alone: true}
	x := left
	y += keyLead
	for i, k := range key {
		w := textWidth(k.Text, captionSize, k.Head) + 16
		mark := 0.0
		switch {
		case k.Point != nil:
			mark = 18
		case k.Line != "" || k.Ribbon != "":
			mark = 36
		}
		if x > left && (x+mark+w-16 > right || (k.Head || k.Break) && i > 0) {
			x, y = left, y+keyLead
		}
		switch {
		case k.Point != nil:
			c.mark(*k.Point, x+7, y-9)
		case k.Line != "":
			c.put(`<path class="line `, esc(k.Line), `" d="M`, nums(x, y-9), `h28"/>`)
		case k.Ribbon != "":
			c.put(`<path class="ribbon `, esc(k.Ribbon), `" d="M`, nums(x+2, y-9), `h26"/>`)
			if strings.Contains(k.Ribbon, "twin") {
				c.put(`<path class="gap" d="M`, nums(x+2, y-9), `h26"/>`)
			}
		}
		class := "key"
		if k.Head {
			class = "key bold"
		}
		c.put(`<text class="`, class, `" x="`, num2(x+mark), `" y="`, num2(y-4), `">`, esc(k.Text), `</text>`)
		x += mark + w
	}
	b.WriteString(c.String())
	return y
}

// mm writes the width in print of a drawing of that many units.
func mm(width float64) string { return num2(printMM(width)) + "mm" }

func mmHeight(width, height float64) string { return num2(height*printMM(width)/width) + "mm" }

func printMM(width float64) float64 {
	if width > (singleUnits+doubleUnits)/2 {
		return doubleMM
	}
	return singleMM
}
