package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/theme"
)

// Names of colours and sizes that the toolkit has no word for.
const (
	colourPane fyne.ThemeColorName = "pane" // ground of panes; the window's ground shows between them
	colourLine fyne.ThemeColorName = "line" // thin rules and frames
	colourDim  fyne.ThemeColorName = "dim"  // words that step back; still 4.5 to 1 on a pane
	colourBody fyne.ThemeColorName = "body" // a facet in the light
	colourDusk fyne.ThemeColorName = "dusk" // a facet out of it
	colourEdge fyne.ThemeColorName = "edge" // edges of the solid
	colourBack fyne.ThemeColorName = "back" // edges behind
)

// brightness is the user's choice of light or dark.
type brightness string

const (
	asSystem brightness = "system"
	inLight  brightness = "light"
	inDark   brightness = "dark"
)

// greys is the program's theme: neutral greys, so that the maps carry the colour,
// one quiet accent, and rows close enough together for a working tool.
type greys struct {
	fyne.Theme
	choice brightness
	scale  float32 // of text and spaces, 1 as drawn
}

func newGreys(choice brightness, scale float32) *greys {
	if scale < 0.8 || scale > 2 { // also catches NaN below
		scale = 1
	}
	if scale != scale {
		scale = 1
	}
	return &greys{Theme: theme.DefaultTheme(), choice: choice, scale: scale}
}

func grey(v uint8) color.NRGBA          { return color.NRGBA{v, v, v, 255} }
func rgb(r, g, b uint8) color.NRGBA     { return color.NRGBA{r, g, b, 255} }
func rgba(r, g, b, a uint8) color.NRGBA { return color.NRGBA{r, g, b, a} }

// shade is one colour of the palette in the dark and in the light variant.
type shade struct{ dark, light color.NRGBA }

// shadeOf returns the palette's colour for a name, false where the toolkit's own stands.
func shadeOf(name fyne.ThemeColorName) (shade, bool) {
	switch name {
	case theme.ColorNameBackground:
		return shade{rgb(0x19, 0x1a, 0x1b), rgb(0xe3, 0xe3, 0xe1)}, true
	case colourPane:
		return shade{rgb(0x22, 0x23, 0x25), rgb(0xf7, 0xf7, 0xf5)}, true
	case colourLine, theme.ColorNameSeparator:
		return shade{rgb(0x3a, 0x3c, 0x3f), rgb(0xcb, 0xcc, 0xc9)}, true
	case colourDim, theme.ColorNamePlaceHolder:
		return shade{rgb(0xa3, 0xa6, 0xaa), rgb(0x5b, 0x5f, 0x63)}, true
	case theme.ColorNameForeground:
		return shade{rgb(0xec, 0xec, 0xea), rgb(0x1a, 0x1c, 0x1e)}, true
	case theme.ColorNameDisabled:
		return shade{rgb(0x75, 0x78, 0x7c), rgb(0x8d, 0x90, 0x93)}, true
	case theme.ColorNamePrimary, theme.ColorNameHyperlink:
		return shade{rgb(0x5f, 0xc4, 0xb4), rgb(0x0a, 0x6c, 0x61)}, true
	case theme.ColorNameForegroundOnPrimary:
		return shade{rgb(0x0c, 0x1f, 0x1c), rgb(0xff, 0xff, 0xff)}, true
	case theme.ColorNameFocus:
		return shade{rgba(0x5f, 0xc4, 0xb4, 0xb0), rgba(0x0a, 0x6c, 0x61, 0xb0)}, true
	case theme.ColorNameSelection:
		return shade{rgba(0x5f, 0xc4, 0xb4, 0x50), rgba(0x0a, 0x6c, 0x61, 0x38)}, true
	case theme.ColorNameButton:
		return shade{rgb(0x31, 0x33, 0x36), rgb(0xe4, 0xe5, 0xe2)}, true
	case theme.ColorNameDisabledButton:
		return shade{rgb(0x29, 0x2a, 0x2c), rgb(0xed, 0xed, 0xeb)}, true
	case theme.ColorNameInputBackground:
		return shade{rgb(0x17, 0x18, 0x19), rgb(0xff, 0xff, 0xff)}, true
	case theme.ColorNameInputBorder:
		return shade{rgb(0x55, 0x58, 0x5c), rgb(0xa9, 0xab, 0xa9)}, true
	case theme.ColorNameMenuBackground, theme.ColorNameOverlayBackground:
		return shade{rgb(0x2a, 0x2b, 0x2e), rgb(0xfc, 0xfc, 0xfb)}, true
	case theme.ColorNameError:
		return shade{rgb(0xf2, 0x8b, 0x82), rgb(0xa8, 0x20, 0x1a)}, true
	case theme.ColorNameWarning:
		return shade{rgb(0xe8, 0xb6, 0x5a), rgb(0x85, 0x55, 0x00)}, true
	case colourBody:
		return shade{grey(0xd4), grey(0xf6)}, true
	case colourDusk:
		return shade{rgb(0x3c, 0x41, 0x46), rgb(0x84, 0x8a, 0x90)}, true
	case colourEdge:
		return shade{grey(0x14), rgb(0x2a, 0x2d, 0x30)}, true
	case colourBack:
		return shade{rgba(0x14, 0x14, 0x14, 0x38), rgba(0x2a, 0x2d, 0x30, 0x38)}, true
	}
	return shade{}, false
}

// Color returns the palette's colour in the variant chosen.
func (g *greys) Color(name fyne.ThemeColorName, variant fyne.ThemeVariant) color.Color {
	switch g.choice {
	case inLight:
		variant = theme.VariantLight
	case inDark:
		variant = theme.VariantDark
	}
	if s, ours := shadeOf(name); ours {
		if variant == theme.VariantLight {
			return s.light
		}
		return s.dark
	}
	return g.Theme.Color(name, variant)
}

// Size returns the sizes of a tool that shows much at once.
func (g *greys) Size(name fyne.ThemeSizeName) float32 {
	switch name {
	case theme.SizeNameText:
		return 13 * g.scale
	case theme.SizeNameCaptionText:
		return 11.5 * g.scale
	case theme.SizeNameSubHeadingText:
		return 15 * g.scale
	case theme.SizeNameHeadingText:
		return 19 * g.scale
	case theme.SizeNameInnerPadding:
		return 6 * g.scale
	case theme.SizeNamePadding:
		return 4 * g.scale
	case theme.SizeNameInlineIcon:
		return 17 * g.scale
	case theme.SizeNameScrollBar:
		return 10
	case theme.SizeNameModalBlurRadius:
		return 0 // what is under a dialog goes on living, and is seen to
	}
	return g.Theme.Size(name)
}

// themed returns the running theme's colour.
func themed(name fyne.ThemeColorName) color.Color {
	settings := fyne.CurrentApp().Settings()
	if _, ours := settings.Theme().(*greys); !ours { // tests that bring the toolkit's own theme
		if s, known := shadeOf(name); known {
			return s.dark
		}
	}
	return settings.Theme().Color(name, settings.ThemeVariant())
}

// themedRGBA returns the running theme's colour for painting pixels.
func themedRGBA(name fyne.ThemeColorName) color.RGBA {
	return color.RGBAModel.Convert(themed(name)).(color.RGBA)
}
