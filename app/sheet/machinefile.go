package sheet

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2"

	"pavilight/facets"
)

// machineVersion is the version of the file that describes a machine.
const machineVersion = 1

// mostMachineBytes is the size above which a file is no description of a machine.
const mostMachineBytes = 1 << 16

// machineFile is a machine as its file has it, angles in degrees.
type machineFile struct {
	Machine        int      `toml:"machine"`
	Name           string   `toml:"name"`
	Gear           int      `toml:"gear"`
	PavilionOffset float64  `toml:"pavilion_angle_offset"`
	CrownOffset    float64  `toml:"crown_angle_offset"`
	AngleStep      *float64 `toml:"angle_step"`
	Cheater        float64  `toml:"cheater"`
	CrownNumbers   string   `toml:"crown_numbers"`
	TransferIndex  float64  `toml:"transfer_index"`
	TableAdapter   float64  `toml:"table_adapter"`
	Grit           []string `toml:"grit"`
}

// MachineTemplate is a machine file to start from.
const MachineTemplate = `machine = 1                  # version of this file
name = "my machine"
gear = 96                    # teeth on the index gear; leave out to take the plan's
pavilion_angle_offset = 0.0  # degrees that the scale shows above the true angle, pavilion to the lap
crown_angle_offset = 0.0     # the same, crown to the lap
angle_step = 0.1             # smallest step of the angle scale, degrees
cheater = 4.0                # how far the index can be shifted either way, degrees; 0 without a cheater
crown_numbers = "reversed"   # how the numbers run round the stone after transfer: same or reversed
transfer_index = 96          # where the gear stands while the stone is transferred
table_adapter = 45.0         # angle of the table adapter, degrees; 0 without one
grit = []                    # your notes on laps and grits, printed on every sheet
`

// ReadMachine reads the description of a machine from a TOML 1.0 text; file is its
// name for messages. Errors are facets.Faults: all that were found.
func ReadMachine(r io.Reader, file string) (Machine, error) {
	data, err := io.ReadAll(io.LimitReader(r, mostMachineBytes+1))
	switch {
	case err != nil:
		return Machine{}, facets.Faults{{File: file, Why: "it cannot be read: " + err.Error(),
			Remedy: "check the disk and try again"}}
	case len(data) > mostMachineBytes:
		return Machine{}, facets.Faults{{File: file, Why: "the file is larger than 64 KiB",
			Remedy: "a machine is described in a dozen lines"}}
	}
	var f machineFile
	var faults facets.Faults
	d := toml.NewDecoder(bytes.NewReader(bytes.TrimPrefix(data, []byte("\ufeff"))))
	d.DisallowUnknownFields()
	if err := d.Decode(&f); err != nil {
		faults = decodeFaults(err, file)
		if !onlyUnknown(err) {
			return Machine{}, faults.Err()
		}
	}
	faults = append(faults, f.faults(file, data)...)
	if err := faults.Err(); err != nil {
		return Machine{}, err
	}
	m := Machine{
		Name:           f.Name,
		Gear:           f.Gear,
		PavilionOffset: facets.Angle(f.PavilionOffset) * facets.Degree,
		CrownOffset:    facets.Angle(f.CrownOffset) * facets.Degree,
		AngleStep:      0.01 * facets.Degree,
		Cheater:        facets.Angle(f.Cheater) * facets.Degree,
		CrownReversed:  f.CrownNumbers != "same",
		TransferIndex:  f.TransferIndex,
		TableAdapter:   facets.Angle(f.TableAdapter) * facets.Degree,
		Grit:           f.Grit,
	}
	if f.AngleStep != nil {
		m.AngleStep = facets.Angle(*f.AngleStep) * facets.Degree
	}
	if m.Name == "" {
		m.Name = strings.TrimSuffix(filepath.Base(file), filepath.Ext(file))
	}
	return m, nil
}

func onlyUnknown(err error) bool {
	var strict *toml.StrictMissingError
	return errors.As(err, &strict)
}

// decodeFaults turns the decoder's error into faults.
func decodeFaults(err error, file string) facets.Faults {
	var strict *toml.StrictMissingError
	if errors.As(err, &strict) {
		var all facets.Faults
		for _, e := range strict.Errors {
			line, _ := e.Position()
			all = append(all, &facets.Fault{File: file, Line: line, Field: strings.Join(e.Key(), "."),
				Why: "a machine has no such key", Remedy: "it may have " + strings.Join(machineKeys(), ", ")})
		}
		return all
	}
	why := []rune(strings.TrimPrefix(err.Error(), "toml: "))
	const most = 200 // letters; the decoder may quote a whole line
	f := &facets.Fault{File: file, Why: string(why[:min(most, len(why))]), Remedy: "correct this line"}
	var de *toml.DecodeError
	if errors.As(err, &de) {
		f.Line, _ = de.Position()
		f.Field = strings.Join(de.Key(), ".")
	}
	return facets.Faults{f}
}

func machineKeys() []string {
	return []string{"machine", "name", "gear", "pavilion_angle_offset", "crown_angle_offset", "angle_step", "cheater",
		"crown_numbers", "transfer_index", "table_adapter", "grit"}
}

// faults reports values that no machine has.
func (f *machineFile) faults(file string, data []byte) facets.Faults {
	var all facets.Faults
	bad := func(field string, got any, why, remedy string) {
		line := 1
		for i, text := range bytes.Split(data, []byte("\n")) {
			if key, _, ok := strings.Cut(string(text), "="); ok && strings.TrimSpace(key) == field {
				line = i + 1
			}
		}
		all = append(all, &facets.Fault{
			File: file, Line: line, Field: field, Got: fmt.Sprint(got), Why: why, Remedy: remedy,
		})
	}
	within := func(field string, v, least, most float64, unit string) {
		if !(v >= least && v <= most) {
			bad(field, v, "it is out of range", fmt.Sprintf("give %g to %g %s", least, most, unit))
		}
	}
	if f.Machine != machineVersion {
		bad("machine", f.Machine, "this version of the file is not known", "write machine = 1 at its head")
	}
	if f.Gear != 0 && (f.Gear < 3 || f.Gear > 1000) {
		bad("gear", f.Gear, "no index gear has so many teeth", "give the number of teeth, 3 to 1000, or leave it out")
	}
	within("pavilion_angle_offset", f.PavilionOffset, -90, 90, "degrees")
	within("crown_angle_offset", f.CrownOffset, -90, 90, "degrees")
	if f.AngleStep != nil {
		within("angle_step", *f.AngleStep, 0.001, 5, "degrees")
	}
	within("cheater", f.Cheater, 0, 60, "degrees")
	within("table_adapter", f.TableAdapter, 0, 90, "degrees")
	if f.CrownNumbers != "" && f.CrownNumbers != "same" && f.CrownNumbers != "reversed" {
		bad("crown_numbers", f.CrownNumbers, "the numbers can run in two ways only", `write "same" or "reversed"`)
	}
	if math.IsNaN(f.TransferIndex) || f.TransferIndex < 0 || f.TransferIndex > 1000 {
		bad("transfer_index", f.TransferIndex, "no gear has such a tooth", "give the tooth at which the stone is transferred")
	}
	return all
}

// Machines is a folder with one file a machine.
type Machines string

// UserMachines returns the folder of the user's machines, which need not exist.
func UserMachines() (Machines, error) {
	folder, err := os.UserConfigDir()
	if err != nil {
		return "", fmt.Errorf("the folder for settings is not known: %w", err)
	}
	return Machines(filepath.Join(folder, "pavilight", "machines")), nil
}

// Names returns the names of the machines in the folder, sorted.
func (m Machines) Names() []string {
	entries, err := os.ReadDir(string(m))
	if err != nil {
		return nil // no folder, no machines
	}
	var names []string
	for _, e := range entries {
		if name, ok := strings.CutSuffix(e.Name(), ".toml"); ok {
			names = append(names, name)
		}
	}
	slices.Sort(names)
	return names
}

// Open reads a machine by its name in the folder, or by the path of its file.
// Errors are facets.Faults.
func (m Machines) Open(name string) (Machine, error) {
	path := name
	if !strings.HasSuffix(strings.ToLower(name), ".toml") {
		if name != filepath.Base(name) {
			return Machine{}, facets.Faults{{File: name, Why: "this is neither a machine's name nor its file",
				Remedy: "name a machine without its folder, or its .toml file"}}
		}
		path = filepath.Join(string(m), name+".toml")
	}
	f, err := os.Open(path)
	if errors.Is(err, fs.ErrNotExist) {
		known := "no machine is described there yet"
		if names := m.Names(); len(names) > 0 && path != name {
			known = "known are " + strings.Join(names, ", ")
		}
		return Machine{}, facets.Faults{{File: path, Why: "there is no such machine; " + known,
			Remedy: "write the file; its lines are\n" + MachineTemplate}}
	}
	if err != nil {
		return Machine{}, facets.Faults{{File: path, Why: "it cannot be opened: " + err.Error(),
			Remedy: "check the name and the permissions"}}
	}
	defer f.Close()
	return ReadMachine(f, path)
}
