package command_test

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"os"

	"pavilight/app/command"
)

// Commands print JSON for other programs.
func ExampleMain() {
	var out bytes.Buffer
	env := command.Environment{Stdout: &out, Stderr: os.Stderr}
	if status := command.Main(context.Background(), []string{"gems", "diamond", "--json"}, env); status != command.Done {
		return
	}
	var gem struct {
		Name     string
		Critical []struct {
			Toward string
			Angle  float64 `json:"critical_angle_deg"`
		} `json:"critical_angles"`
	}
	if err := json.Unmarshal(out.Bytes(), &gem); err != nil {
		fmt.Println(err)
	}
	for _, pair := range gem.Critical {
		fmt.Printf("%s in %s: %.1f°\n", gem.Name, pair.Toward, pair.Angle)
	}
	// Output:
	// Diamond in air: 24.4°
	// Diamond in water: 33.5°
	// Diamond in oil: 37.7°
}
