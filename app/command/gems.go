package command

import (
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"text/tabwriter"

	"pavilight/gems"
	"pavilight/trace"
)

// gemsCommand prints the material table.
type gemsCommand struct {
	Name string `arg:"" optional:"" help:"A key or name of the table; without it, the whole table."`
}

// gemRow is one material as JSON prints it.
type gemRow struct {
	gems.Description
	Critical []criticalPair `json:"critical_angles"`
}

// criticalPair is the critical angle from inside a material toward a surrounding, both
// at the sodium D line, the material at its ordinary or mean index.
type criticalPair struct {
	Toward string   `json:"toward"`
	Index  float64  `json:"index"`
	Angle  *float64 `json:"critical_angle_deg"` // null where there is none
}

// against names the surroundings whose critical angles are printed.
func against() []string { return []string{"air", "water", "oil"} }

// Run prints one material or all of them.
func (g *gemsCommand) Run(c call) error {
	materials := c.library.Materials()
	if g.Name != "" {
		m, err := findMaterial(c.library, g.Name)
		if err != nil {
			return err
		}
		materials = []*gems.Material{m}
	}
	rows := make([]gemRow, len(materials))
	for i, m := range materials {
		critical, err := criticalAngles(m)
		if err != nil {
			return err
		}
		rows[i] = gemRow{m.Describe(), critical}
	}
	switch {
	case c.json && g.Name != "":
		return printJSON(c.out, rows[0])
	case c.json:
		return printJSON(c.out, rows)
	case g.Name != "":
		printGem(c.out, rows[0])
	default:
		printGems(c.out, materials, rows)
	}
	return nil
}

// findMaterial finds a material by key or name.
func findMaterial(library *gems.Library, name string) (*gems.Material, error) {
	m, err := library.Find(name)
	var unknown *gems.UnknownError
	if errors.As(err, &unknown) {
		return nil, inputFault(err)
	}
	return m, err
}

// criticalAngles returns a material's critical angles toward the usual surroundings.
func criticalAngles(m *gems.Material) ([]criticalPair, error) {
	inside, err := m.Index(gems.LineD)
	if err != nil {
		return nil, err
	}
	var pairs []criticalPair
	for _, key := range against() {
		medium, err := gems.Find(key)
		if err != nil {
			return nil, err
		}
		around, err := medium.Index(gems.LineD)
		if err != nil {
			return nil, err
		}
		pair := criticalPair{Toward: medium.Key, Index: around}
		if angle, ok := trace.CriticalAngle(inside, around); ok {
			degrees := angle.Degrees()
			pair.Angle = &degrees
		}
		pairs = append(pairs, pair)
	}
	return pairs, nil
}

func printGems(w io.Writer, materials []*gems.Material, rows []gemRow) {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	heading := gems.Heading()
	for _, key := range against() {
		heading = append(heading, "critical in "+key)
	}
	fmt.Fprintln(t, strings.Join(heading, "\t"))
	for i, m := range materials {
		cells := m.Row()
		for _, pair := range rows[i].Critical {
			cells = append(cells, inDegrees(pair.Angle, "none"))
		}
		fmt.Fprintln(t, strings.Join(cells, "\t"))
	}
	t.Flush()
	fmt.Fprintln(w, "\nSources and cautions: pavilight gems NAME.")
}

// printGem prints a material's page, its sources numbered below it.
func printGem(w io.Writer, r gemRow) {
	const label = 20 // width of the first column
	var sources []gems.Source
	numbered := func(s gems.Source) string {
		if s == "" {
			return ""
		}
		i := slices.Index(sources, s)
		if i < 0 {
			i, sources = len(sources), append(sources, s)
		}
		return fmt.Sprintf(" [%d]", i+1)
	}
	cautions := false
	fmt.Fprintf(w, "%-*s%s\n", label, "key", r.Key)
	for _, e := range r.Entries() {
		cautions = cautions || e.Label == "caution"
		fmt.Fprintf(w, "%-*s%s%s\n", label, e.Label, e.Value, numbered(e.Source))
	}
	for _, pair := range r.Critical {
		fmt.Fprintf(w, "%-*s%s toward %s, %.4f\n", label, "critical angle", inDegrees(pair.Angle, "there is none"),
			pair.Toward, pair.Index)
	}
	if cautions {
		fmt.Fprintf(w, "\nThe cautions are the usual ones: local codes and licensed practice come first.\n")
	}
	fmt.Fprintln(w, "\nSources")
	for i, s := range sources {
		fmt.Fprintf(w, "  [%d] %s\n", i+1, s)
	}
}
