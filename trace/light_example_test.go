package trace_test

import (
	"fmt"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/trace"
)

// The zenith of an overcast sky is brighter than a white sheet of paper under it.
func ExampleFindLight() {
	sky, err := trace.FindLight("overcast")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("zenith %.3f, near the horizon %.3f\n",
		sky.Luminance(mgl64.Vec3{0, 0, 1}), sky.Luminance(mgl64.Vec3{1, 0, 0.01}.Normalize()))
	_, err = trace.FindLight("candle")
	fmt.Println(err)
	// Output:
	// zenith 1.286, near the horizon 0.437
	// light "candle" is not known; use one of even, overcast, clear, sun, room, lamps, ring
}
