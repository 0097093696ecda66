package main

import (
	"fyne.io/fyne/v2/app"
	"fyne.io/fyne/v2/widget"
	_ "github.com/go-gl/mathgl/mgl64"
	_ "github.com/pelletier/go-toml/v2"
	_ "gonum.org/v1/gonum/optimize"
	_ "gonum.org/v1/gonum/stat/distuv"
)

func main() {
	a := app.NewWithID("org.pavilight")
	w := a.NewWindow("x")
	w.SetContent(widget.NewLabel("x"))
	w.ShowAndRun()
}
