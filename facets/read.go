package facets

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
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2/unstable"
)

// OpenPlan reads the plan file at path. Errors are Faults.
func OpenPlan(path string) (*Plan, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, cannotOpen(path, err)
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return nil, Faults{{File: path, Why: "this is a folder", Remedy: "name a plan file (.toml) in it"}}
	}
	return ReadPlan(f, path)
}

func cannotOpen(path string, err error) error {
	f := &Fault{File: path, Why: "it cannot be opened: " + err.Error(),
		Remedy: "check the name and the permissions"}
	switch {
	case errors.Is(err, fs.ErrNotExist):
		f.Why, f.Remedy = "there is no such file", "check the name and the folder"
	case errors.Is(err, fs.ErrPermission):
		f.Why, f.Remedy = "it may not be read", "change its permissions or copy it"
	}
	return Faults{f}
}

// ReadPlan reads a plan from r; file is its name for messages. It checks all
// that can be checked without solving, and returns all faults at once as
// Faults. Line ends may be LF or CRLF, and a byte-order mark may stand in
// front. Whether a material key is known is not checked here.
func ReadPlan(r io.Reader, file string) (*Plan, error) {
	data, err := io.ReadAll(io.LimitReader(r, MaxPlanBytes+1))
	if err != nil {
		return nil, Faults{{File: file, Why: "it cannot be read: " + err.Error(),
			Remedy: "check the disk and try again"}}
	}
	if f := refuse(data); f != nil {
		f.File = file
		return nil, Faults{f}
	}
	bom := []byte("\ufeff")
	hasBOM := bytes.HasPrefix(data, bom)
	data = slices.Clip(bytes.TrimPrefix(data, bom))
	blocks, err := splitBlocks(data, file)
	if err != nil {
		var f *Fault
		if errors.As(err, &f) {
			return nil, Faults{f}
		}
		return nil, err
	}
	rd := &reader{plan: &Plan{File: file}, lines: map[string]int{}}
	rd.plan.layout = &layout{newline: "\n", bom: hasBOM, head: blocks[0]}
	if bytes.Contains(data, []byte("\r\n")) {
		rd.plan.layout.newline = "\r\n"
	}
	rd.read(blocks)
	if rd.more > 0 {
		rd.faults = append(rd.faults, &Fault{File: file, Line: math.MaxInt32,
			Why: fmt.Sprintf("and %d more faults", rd.more), Remedy: "mend these first"})
	}
	if err := rd.faults.Err(); err != nil {
		if rd.more > 0 {
			rd.faults[len(rd.faults)-1].Line = 0 // it was there to be sorted last
		}
		return nil, err
	}
	rd.plan.remember()
	return rd.plan, nil
}

// refuse looks for what is no plan file at all.
func refuse(data []byte) *Fault {
	switch {
	case len(data) > MaxPlanBytes:
		return &Fault{Why: "the file is larger than 1 MiB",
			Remedy: "a plan is a short text; is this a scan or a picture?"}
	case len(bytes.TrimSpace(bytes.TrimPrefix(data, []byte("\ufeff")))) == 0:
		return &Fault{Why: "the file is empty", Remedy: "start from one of the sample plans"}
	case bytes.IndexByte(data, 0) >= 0 || !utf8.Valid(data):
		return &Fault{Why: "this is not text in UTF-8",
			Remedy: "name a plan file; a scan is recognised by its ending .stl, .obj or .ply"}
	}
	return nil
}

// reader turns the blocks of a file into a plan and gathers the faults.
type reader struct {
	plan   *Plan
	faults Faults
	more   int            // faults beyond those
	tier   string         // being read
	lines  map[string]int // of the keys of the table being read
}

// mostFaults is how many faults of one file are told; the rest are counted.
const mostFaults = 100

func (r *reader) fault(line int, field, got, why, remedy string) {
	if len(r.faults) == mostFaults {
		r.more++
		return
	}
	r.faults = append(r.faults, &Fault{
		File: r.plan.File, Line: line, Tier: r.tier, Field: field, Got: shorten(got), Why: why,
		Remedy: remedy,
	})
}

// The keys of each table, in the order in which they are written.
func headKeys() []string {
	return []string{"plan", "name", "author", "notes", "material", "width_mm", "gear", "polish", "axis",
		"rough"}
}

func tierKeys() []string {
	return []string{"name", "side", "angle", "index", "fold", "mirror", "distance", "centre", "meet", "level",
		"edge",
		"girdle", "table", "culet", "temporary", "stage", "note"}
}

func (r *reader) read(blocks []*block) {
	r.head(blocks)
	r.sort(blocks[1:])
	l := r.plan.layout
	for _, b := range append(slices.Clone(l.before), l.after...) {
		for _, sub := range b.subs {
			b.entries = append(b.entries, entry{key: "avoid", line: sub.line,
				value: item{kind: unstable.Array, list: []item{{kind: unstable.InlineTable,
					table: sub.entries, line: sub.line}}}})
		}
		r.headTable(b.header[0], b.line, b.entries)
	}
	if _, ok := r.lines["material"]; !ok {
		r.fault(1, "material", "", "the material is missing",
			"write material = \"quartz\" or what the stone is made of")
	}
	for i := range r.plan.Tiers {
		r.readTier(&r.plan.Tiers[i])
	}
	r.together()
}

// sort puts the blocks after the head in their places: tiers with the transfer
// before them, the plan's own tables, and tables within tables.
func (r *reader) sort(blocks []*block) {
	l := r.plan.layout
	var last *block
	var transfer *Transfer
	within := func(b *block, name string, depth int) bool {
		return last != nil && last.header[0] == name && b.header[0] == name && len(b.header) == depth
	}
	for _, b := range blocks {
		name := strings.Join(b.header, ".")
		switch {
		case name == "tier" && b.list:
			r.plan.Tiers = append(r.plan.Tiers, Tier{Line: b.line, Transfer: transfer, block: b})
			transfer, last = nil, b
		case name == "transfer" && b.list:
			if transfer != nil {
				r.fault(b.line, "[[transfer]]", "", "the stone is turned twice in a row",
					"delete one of the two")
			}
			transfer, last = r.transfer(b), b
		case !b.list && within(b, "tier", 2), name == "rough.avoid" && b.list && within(b, "rough", 2):
			last.subs = append(last.subs, b)
		case name == "material" || name == "axis" || name == "rough":
			last = b
			if len(r.plan.Tiers) > 0 {
				l.after = append(l.after, b)
			} else {
				l.before = append(l.before, b)
			}
		case name == "tier" || name == "transfer":
			r.fault(b.line, "["+name+"]", "", "the brackets are single", "write [["+name+"]]")
		default:
			r.fault(b.line, "["+name+"]", "", "there is no such table in a plan",
				"the tables are [[tier]], [[transfer]], [material], [axis] and [rough]")
		}
	}
	if transfer != nil {
		r.fault(transfer.Line, "[[transfer]]", "", "nothing is cut after it",
			"delete it or add the tiers that follow")
	}
}

func (r *reader) transfer(b *block) *Transfer {
	x := &Transfer{Line: b.line, block: b}
	r.known(b.entries, "transfer", []string{"note"})
	for _, e := range b.entries {
		if e.key == "note" {
			x.Note = r.str(e)
		}
	}
	return x
}

// known reports keys that a table does not have.
func (r *reader) known(entries []entry, table string, keys []string) {
	for _, e := range entries {
		if !slices.Contains(keys, e.key) {
			r.fault(e.line, e.key, e.value.written, "a "+table+" has no such key",
				"it may have "+strings.Join(keys, ", "))
		}
	}
}

// undot gathers dotted keys (material.name = ...) into one table entry each.
func undot(entries []entry) []entry {
	var out []entry
	for _, e := range entries {
		top, rest, dotted := strings.Cut(e.key, ".")
		if !dotted {
			out = append(out, e)
			continue
		}
		part := e
		part.key = rest
		if k := slices.IndexFunc(out, func(o entry) bool { return o.key == top }); k >= 0 {
			out[k].value.table = append(out[k].value.table, part)
			continue
		}
		e.key, e.value = top, item{kind: unstable.InlineTable, written: "{...}", table: []entry{part},
			line: e.line}
		out = append(out, e)
	}
	return out
}

func (r *reader) head(blocks []*block) {
	entries := undot(blocks[0].entries)
	r.known(entries, "plan", headKeys())
	p := r.plan
	version, width, gear := false, false, false
	for _, e := range entries {
		switch e.key {
		case "plan":
			version = true
			if v, ok := r.whole(e); ok && v != PlanVersion {
				r.fault(e.line, "plan", e.value.written, "this version of the plan file is not known",
					fmt.Sprintf("this program reads version %d; a newer program may read yours", PlanVersion))
			}
		case "name":
			p.Name = r.str(e)
		case "author":
			p.Author = r.str(e)
		case "notes":
			p.Notes = r.str(e)
		case "width_mm":
			width = true
			if v, ok := r.num(e); ok {
				if v < 0.1 || v > 1000 {
					r.fault(e.line, "width_mm", e.value.written, "no stone is this wide",
						"give the finished width in mm, 0.1 to 1000")
				}
				p.WidthMM = v
			}
		case "gear":
			gear = true
			if v, ok := r.whole(e); ok {
				if v < 3 || v > 1000 {
					r.fault(e.line, "gear", e.value.written, "no index gear has so many teeth",
						"give the number of teeth, 3 to 1000")
				}
				p.Gear = v
			}
		case "polish":
			p.Polish = r.strings(e)
		case "material", "axis", "rough":
			if e.key == "material" && e.value.kind == unstable.String {
				p.Material.Key, p.Material.Line = r.str(e), e.line
				if p.Material.Key == "" {
					r.fault(e.line, "material", "", "it is empty",
						"give the key of a material, as in material = \"corundum\"")
				}
				r.lines["material"] = e.line
				continue
			}
			if e.value.kind != unstable.InlineTable {
				r.fault(e.line, e.key, e.value.written, "this is not a table", "write "+e.key+" = { ... }")
				r.lines[e.key] = e.line
				continue
			}
			r.headTable(e.key, e.line, e.value.table)
		}
	}
	if !version {
		r.fault(1, "plan", "", "the file does not say that it is a plan",
			fmt.Sprintf("write plan = %d at its head", PlanVersion))
	}
	if !width {
		r.fault(1, "width_mm", "", "the width is missing",
			"write width_mm = 8.0 or what the stone shall measure")
	}
	if !gear {
		r.fault(1, "gear", "", "the index gear is missing", "write gear = 96 or how many teeth yours has")
	}
	if p.Name == "" {
		base := filepath.Base(p.File)
		p.Name = strings.TrimSuffix(base, filepath.Ext(base))
	}
}

// headTable reads material, axis or rough.
func (r *reader) headTable(name string, line int, entries []entry) {
	r.lines[name] = line
	p := r.plan
	switch name {
	case "material":
		p.Material.Line = line
		r.known(entries, "material", []string{"name", "index", "density"})
		for _, e := range entries {
			switch e.key {
			case "name":
				p.Material.Name = r.str(e)
			case "index":
				if v, ok := r.num(e); ok {
					if v < 1 || v > 5 {
						r.fault(e.line, "index", e.value.written,
							"no transparent gem has this refractive index", "give a number from 1 to 5")
					}
					p.Material.Index = v
				}
			case "density":
				if v, ok := r.num(e); ok {
					if v <= 0 || v > 30 {
						r.fault(e.line, "density", e.value.written, "nothing solid has this density",
							"give g/cm3, above 0 to 30")
					}
					p.Material.Density = v
				}
			}
		}
		if !slices.ContainsFunc(entries, func(e entry) bool { return e.key == "index" }) {
			r.fault(line, "material", "", "its refractive index is missing", "add index = 1.6 or what it is")
		}
	case "axis":
		r.known(entries, "axis", []string{"tilt", "azimuth", "spin"})
		p.Axis = &Axis{}
		for _, e := range entries {
			v, ok := r.num(e)
			switch {
			case !ok:
			case math.Abs(v) > 360:
				r.fault(e.line, e.key, e.value.written, "the angle is out of range",
					"give degrees, -360 to 360")
			case e.key == "tilt":
				p.Axis.Tilt = Angle(v) * Degree
			case e.key == "azimuth":
				p.Axis.Azimuth = Angle(v) * Degree
			case e.key == "spin":
				p.Axis.Spin = Angle(v) * Degree
			}
		}
	case "rough":
		r.rough(line, entries)
	}
}

func (r *reader) rough(line int, entries []entry) {
	r.known(entries, "rough", []string{"shape", "size_mm", "file", "allowance_mm", "avoid"})
	q := &RoughRef{}
	r.plan.Rough = q
	for _, e := range entries {
		switch e.key {
		case "shape":
			q.Shape = r.str(e)
		case "size_mm":
			q.SizeMM = r.nums(e)
			for _, v := range q.SizeMM {
				if v <= 0 || v > mostRoughMM {
					r.fault(e.line, "size_mm", e.value.written, "no rough has such a size", "give sizes in mm, above 0")
				}
			}
		case "file":
			q.File = r.str(e)
			if q.File != "" && !beside(q.File) {
				r.fault(e.line, "file", e.value.written, "a plan names a scan in its own folder or below, nowhere else",
					"put the scan beside the plan and write its name alone")
			}
		case "allowance_mm":
			v, ok := r.num(e)
			if ok && v < 0 {
				r.fault(e.line, "allowance_mm", e.value.written, "it is below 0",
					"give mm to grind away all round")
			}
			q.AllowanceMM, q.HasAllowance = v, true
		case "avoid":
			if e.value.kind != unstable.Array {
				r.fault(e.line, "avoid", e.value.written, "this is not a list",
					"write avoid = [ { point_mm = [1, 2, 3], radius_mm = 0.5 } ]")
				continue
			}
			for _, it := range e.value.list {
				q.Avoid = append(q.Avoid, r.flaw(it))
			}
		}
	}
	want := map[string]int{"box": 3, "ellipsoid": 3, "cylinder": 2, "scan": 0}
	n, ok := want[q.Shape]
	switch {
	case !ok:
		r.fault(line, "shape", q.Shape, "this shape of rough is not known",
			"it may be box, cylinder, ellipsoid or scan")
	case q.Shape == "scan" && q.File == "":
		r.fault(line, "rough", "", "the scan's file is missing", "add file = \"rough.stl\"")
	case len(q.SizeMM) != n:
		r.fault(line, "size_mm", fmt.Sprint(q.SizeMM), fmt.Sprintf("a %s needs %d sizes", q.Shape, n),
			"box and ellipsoid have three extents, a cylinder diameter and height, a scan none")
	}
}

// beside reports whether a path from a plan stays in the plan's folder, on any system: a
// plan may come from a stranger, and must not name a device or another machine's folder.
func beside(path string) bool {
	return filepath.IsLocal(path) && !strings.ContainsAny(path, "\\:\x00")
}

func (r *reader) flaw(it item) RoughFlaw {
	var f RoughFlaw
	if it.kind != unstable.InlineTable {
		r.fault(it.line, "avoid", it.written, "this is not a table",
			"write { point_mm = [1, 2, 3], radius_mm = 0.5 }")
		return f
	}
	r.known(it.table, "place to avoid", []string{"point_mm", "radius_mm", "normal"})
	three := func(e entry) (v [3]float64) {
		list := r.nums(e)
		if len(list) != 3 {
			r.fault(e.line, e.key, e.value.written, "three numbers are needed", "write "+e.key+" = [1, 2, 3]")
			return v
		}
		return [3]float64(list)
	}
	for _, e := range it.table {
		switch e.key {
		case "point_mm":
			f.PointMM = three(e)
		case "radius_mm":
			f.RadiusMM, _ = r.num(e)
		case "normal":
			f.Normal = three(e)
		}
	}
	if (f.RadiusMM > 0) == (f.Normal != [3]float64{}) {
		r.fault(it.line, "avoid", "", "it is neither a ball nor a plane",
			"give radius_mm for a ball, or normal for a plane")
	}
	return f
}

func (r *reader) str(e entry) string {
	if e.value.kind != unstable.String {
		r.fault(e.line, e.key, e.value.written, "this is not a text", "put it in quotes")
		return ""
	}
	return e.value.text
}

func (r *reader) num(e entry) (float64, bool) {
	v, ok := e.value.number()
	if !ok {
		r.fault(e.line, e.key, e.value.written, "this is not a number", "write it plainly, as in 41.5")
		return 0, false
	}
	if math.IsNaN(v) || math.IsInf(v, 0) || math.Abs(v) > 1e9 {
		r.fault(e.line, e.key, e.value.written, "this is not a finite number of sensible size",
			"write it plainly, as in 41.5")
		return 0, false
	}
	return v, true
}

func (r *reader) whole(e entry) (int, bool) {
	v, ok := r.num(e)
	if ok && v != math.Trunc(v) {
		r.fault(e.line, e.key, e.value.written, "this is not a whole number", "write it without a fraction")
		return 0, false
	}
	return int(v), ok
}

func (r *reader) truth(e entry) bool {
	if e.value.kind != unstable.Bool {
		r.fault(e.line, e.key, e.value.written, "this is neither true nor false",
			"write true or false, without quotes")
		return false
	}
	return e.value.text == "true"
}

// nums reads a number or a list of numbers.
func (r *reader) nums(e entry) []float64 {
	list := e.value.list
	if e.value.kind != unstable.Array {
		list = []item{e.value}
	}
	var out []float64
	for _, it := range list {
		if v, ok := r.num(entry{key: e.key, line: it.line, value: it}); ok {
			out = append(out, v)
		}
	}
	return out
}

// strings reads a text or a list of texts.
func (r *reader) strings(e entry) []string {
	list := e.value.list
	if e.value.kind != unstable.Array {
		list = []item{e.value}
	}
	var out []string
	for _, it := range list {
		out = append(out, r.str(entry{key: e.key, line: it.line, value: it}))
	}
	return out
}

func sideWords() []string { return []string{"pavilion", "girdle", "crown", "table"} }

func (r *reader) readTier(t *Tier) {
	b := t.block
	entries := undot(b.entries)
	for _, sub := range b.subs {
		entries = append(entries, entry{key: sub.header[1], line: sub.line,
			value: item{kind: unstable.InlineTable, written: "{...}", table: sub.entries, line: sub.line}})
	}
	for _, e := range entries {
		if e.key == "name" && e.value.kind == unstable.String {
			t.Name = e.value.text
		}
	}
	r.tier = t.Name
	defer func() { r.tier = "" }()
	r.known(entries, "tier", tierKeys())
	hasSide, hasIndex, indexLine := false, false, t.Line
	for _, e := range entries {
		switch e.key {
		case "name":
			t.Name = r.str(e)
		case "side":
			word := r.str(e)
			k := slices.Index(sideWords(), word)
			hasSide = true
			if k < 0 {
				r.fault(e.line, "side", word, "there is no such side", "it may be "+strings.Join(sideWords(),
					", "))
				k = 0
				hasSide = false
			}
			t.Side = Side(k)
		case "angle":
			if v, ok := r.num(e); ok {
				t.HasAngle = true
				t.Angle = Angle(v) * Degree
				if v < 0 || v > 90 {
					r.fault(e.line, "angle", e.value.written, "the angle is impossible",
						"give 0 to 90 degrees, measured from the girdle plane")
					t.Angle = 45 * Degree
				}
			} else {
				t.HasAngle, t.Angle = true, 45*Degree
			}
		case "index":
			hasIndex, indexLine = true, e.line
			t.Index = r.nums(e)
			if len(t.Index) == 0 {
				r.fault(e.line, "index", e.value.written, "the list holds no index",
					"give at least one, or delete the key")
			}
			for _, v := range t.Index {
				if r.plan.Gear > 0 && (v < 0 || v > float64(r.plan.Gear)) {
					r.fault(e.line, "index", number(v), "the gear has no such tooth",
						fmt.Sprintf("give 0 to %d", r.plan.Gear))
				}
			}
		case "fold":
			if v, ok := r.whole(e); ok {
				t.Fold = v
				if v < 1 || v > MaxPlanFacets {
					r.fault(e.line, "fold", e.value.written, "a facet cannot be repeated so many times",
						"give 1 or more")
					t.Fold = 1
				}
			}
		case "mirror":
			t.Mirror = r.truth(e)
		case "distance", "centre", "level", "girdle", "table", "culet", "meet", "edge":
			r.stop(t, e)
		case "temporary":
			t.Temporary = r.truth(e)
		case "note":
			t.Note = r.str(e)
		case "stage":
			t.Stage = r.str(e)
			if !slices.Contains([]string{"preform", "cut", "polish"}, t.Stage) {
				r.fault(e.line, "stage", t.Stage, "there is no such stage",
					"it may be preform, cut or polish")
			}
		}
	}
	r.checkTier(t, hasSide, hasIndex, indexLine)
}

// stop reads a stop rule.
func (r *reader) stop(t *Tier, e entry) {
	if t.Stop.Rule != NoStop {
		r.fault(e.line, e.key, e.value.written,
			fmt.Sprintf("the tier stops by %s already (line %d)", t.Stop.Rule, t.Stop.Line),
			"keep one of the two")
		return
	}
	t.Stop.Rule = Rule(slices.Index(ruleWords[:], e.key))
	t.Stop.Line = e.line
	switch t.Stop.Rule {
	case StopMeet:
		r.meet(t, e)
	case StopEdge:
		if e.value.kind != unstable.InlineTable {
			r.fault(e.line, "edge", e.value.written, "this is not a table",
				"write edge = { with = \"P1\", height = -0.4 }")
			return
		}
		r.known(e.value.table, "rule edge", []string{"with", "height"})
		seen := map[string]bool{}
		for _, k := range e.value.table {
			seen[k.key] = true
			switch k.key {
			case "with":
				t.Stop.With = r.str(k)
			case "height":
				t.Stop.Value, _ = r.num(k)
			}
		}
		for _, k := range []string{"with", "height"} {
			if !seen[k] {
				r.fault(e.line, "edge", "", "its "+k+" is missing",
					"write edge = { with = \"P1\", height = -0.4 }")
			}
		}
	default:
		v, ok := r.num(e)
		if !ok {
			return
		}
		t.Stop.Value = v
		switch t.Stop.Rule {
		case StopCentre, StopGirdle:
			if v <= 0 {
				r.fault(e.line, e.key, e.value.written, "it is not above 0",
					"give the length in plan units, without a sign")
			}
		case StopTable, StopCulet:
			if v <= 0 || v >= 1 {
				r.fault(e.line, e.key, e.value.written, "it is no share of the width",
					"give a number between 0 and 1, as in 0.56")
			}
		}
	}
}

// meet reads the corners of a meet rule: one list of marks, or a list of such
// lists.
func (r *reader) meet(t *Tier, e entry) {
	if e.value.kind != unstable.Array || len(e.value.list) == 0 {
		r.fault(e.line, "meet", e.value.written, "this is not a list of planes",
			"write meet = [\"P1@6\", \"P1@18\", \"G1@12\"]")
		return
	}
	corners := [][]item{e.value.list}
	if e.value.list[0].kind == unstable.Array {
		corners = nil
		for _, it := range e.value.list {
			corners = append(corners, it.list)
		}
	}
	for _, list := range corners {
		var marks []Mark
		for _, it := range list {
			if it.kind != unstable.String {
				r.fault(it.line, "meet", it.written, "this is not the name of a plane",
					"write it in quotes: \"P1@6\"")
				continue
			}
			marks = append(marks, r.mark(it))
		}
		t.Stop.Corners = append(t.Stop.Corners, marks)
	}
}

func (r *reader) mark(it item) Mark {
	name, tooth, has := strings.Cut(it.text, "@")
	m := Mark{Tier: strings.TrimSpace(name), HasIndex: has}
	if !has {
		return m
	}
	v, err := strconv.ParseFloat(strings.TrimSpace(tooth), 64)
	switch {
	case err != nil || math.IsNaN(v):
		r.fault(it.line, "meet", it.text, "what follows the @ is no index", "write the tooth there: \"P1@6\"")
	case r.plan.Gear > 0 && (v < 0 || v > float64(r.plan.Gear)):
		r.fault(it.line, "meet", it.text, "the gear has no such tooth", fmt.Sprintf("give 0 to %d",
			r.plan.Gear))
	case m.Tier == AxisName:
		r.fault(it.line, "meet", it.text, "the axis has no index", "write \"axis\" alone")
	}
	m.Index = v
	return m
}

// checkTier looks at the tier's keys together.
func (r *reader) checkTier(t *Tier, hasSide, hasIndex bool, indexLine int) {
	r.checkName(t)
	if !hasSide {
		if !t.block.has("side") {
			r.fault(t.Line, "side", "", "the side is missing", "it may be "+strings.Join(sideWords(), ", "))
		}
		return
	}
	if t.Stop.Rule == NoStop {
		r.fault(t.Line, "", "", "nothing says how deep the tier is cut",
			"give one stop rule: "+strings.Join(ruleWords[1:], ", "))
		return
	}
	r.checkAngle(t)
	r.checkRule(t)
	switch {
	case t.Side == Table || t.Stop.Rule == StopCulet:
		t.Angle, t.HasAngle = 0, true
	case t.Side == Girdle:
		t.Angle, t.HasAngle = 90*Degree, true
	}
	r.checkUnknowns(t, hasIndex, indexLine)
}

func (r *reader) checkName(t *Tier) {
	switch {
	case t.Name == "":
		r.fault(t.Line, "name", "", "the tier has no name", "write name = \"P1\" or what you call it")
	case t.Name == AxisName || strings.ContainsAny(t.Name, "@\n\r"):
		r.fault(t.Line, "name", t.Name, "a tier may not have this name",
			"leave out @ and do not call it axis")
	}
}

// checkAngle compares an angle that was given with the tier's side.
func (r *reader) checkAngle(t *Tier) {
	if !t.HasAngle {
		return
	}
	deg := t.Angle.Degrees()
	why, remedy := "", ""
	switch {
	case t.Side == Table && deg != 0:
		why, remedy = "a table is level", "leave the angle out, or put the tier on the crown side"
	case t.Side == Girdle && deg != 90:
		why, remedy = "a girdle facet stands upright",
			"leave the angle out, or put the tier on the crown or pavilion side"
	case t.Side == Crown && deg == 0:
		why, remedy = "a level facet on top is the table", "write side = \"table\""
	case t.Side != Girdle && deg == 90:
		why, remedy = "an upright facet belongs to the girdle", "write side = \"girdle\""
	default:
		return
	}
	r.fault(t.block.lineOf("angle"), "angle", number(deg), why, remedy)
}

// checkRule compares the stop rule with the tier's side.
func (r *reader) checkRule(t *Tier) {
	why, remedy := "", ""
	switch rule := t.Stop.Rule; {
	case rule == StopTable && t.Side != Table:
		why, remedy = "the rule is for the table only", "write side = \"table\" or use another rule"
	case rule == StopCulet && (t.Side != Pavilion || t.HasAngle && t.Angle != 0):
		why, remedy = "the rule is for a level flat under the pavilion",
			"write side = \"pavilion\" and leave the angle out"
	case t.Side == Girdle && rule != StopDistance && rule != StopMeet && rule != StopTable && rule != StopCulet:
		why, remedy = "an upright facet cannot stop by it", "use distance or meet"
	default:
		return
	}
	r.fault(t.Stop.Line, t.Stop.Rule.String(), "", why, remedy)
}

// checkUnknowns looks whether the corners give what the tier leaves open, and
// whether the corners are enough in themselves.
func (r *reader) checkUnknowns(t *Tier, hasIndex bool, indexLine int) {
	corners := len(t.Stop.Corners)
	flat := t.HasAngle && t.Angle == 0
	if !t.HasAngle && corners < 2 {
		r.fault(t.Line, "angle", "", "the angle is missing and cannot be found",
			"give it, or name two corners in meet")
	}
	enough := !t.HasAngle && corners >= 3 || t.Side == Girdle && corners >= 2
	if !flat && !hasIndex && !enough {
		r.fault(indexLine, "index", "", "the index is missing and cannot be found",
			"give it, or name three corners in meet and leave the angle out")
	}
	if flat && t.Side != Crown && (len(t.Index) > 1 || t.Fold > 1 || t.Mirror) {
		r.fault(indexLine, "index", "", "a level flat is one facet wherever the index stands",
			"give one index or none")
	}
	for _, c := range t.Stop.Corners {
		// The axis counts for two planes; a name alone may stand for two facets.
		more := slices.ContainsFunc(c, func(m Mark) bool { return m.Tier == AxisName || !m.HasIndex })
		if len(c) < 2 || len(c) < 3 && !more {
			r.fault(t.Stop.Line, "meet", markNames(c), "a corner needs three planes",
				"name all three; the axis counts for two")
		}
	}
}

// lineOf returns the line of a key, or of the block if it has no such key.
func (b *block) lineOf(key string) int {
	for _, e := range b.entries {
		if e.key == key {
			return e.line
		}
	}
	return b.line
}

func markNames(c []Mark) string {
	words := make([]string, len(c))
	for i, m := range c {
		words[i] = m.String()
	}
	return strings.Join(words, " ")
}

// together checks the tiers against each other.
func (r *reader) together() {
	p := r.plan
	if len(p.Tiers) == 0 {
		r.fault(0, "", "", "the plan has no tier", "add [[tier]] tables; see the sample plans")
		return
	}
	at := map[string]int{}
	total := 0
	for i := range p.Tiers {
		t := &p.Tiers[i]
		r.tier = t.Name
		if first, ok := at[t.Name]; ok && t.Name != "" {
			r.fault(t.Line, "name", t.Name, fmt.Sprintf("a tier of this name stands at line %d already",
				p.Tiers[first].Line),
				"give each tier its own name")
		} else {
			at[t.Name] = i
		}
	}
	for i := range p.Tiers {
		t := &p.Tiers[i]
		r.tier = t.Name
		if n := max(1, len(t.Index)) * max(1, t.Fold); n > MaxPlanFacets {
			total += n
		} else {
			total += len(t.Indices(max(3, p.Gear)))
		}
		if total > MaxPlanFacets {
			r.fault(t.Line, "", "", fmt.Sprintf("here the plan goes beyond %d facets", MaxPlanFacets),
				"leave some out")
			return
		}
	}
	for i := range p.Tiers {
		t := &p.Tiers[i]
		r.tier = t.Name
		for _, c := range t.Stop.Corners {
			for _, m := range c {
				r.refers(at, i, m.Tier, m.String())
			}
		}
		if t.Stop.With != "" {
			r.refers(at, i, t.Stop.With, t.Stop.With)
		}
	}
	r.tier = ""
}

// refers checks that tier i may stop by the tier of this name.
func (r *reader) refers(at map[string]int, i int, name, written string) {
	if name == AxisName {
		return
	}
	t := &r.plan.Tiers[i]
	k, ok := at[name]
	field := t.Stop.Rule.String()
	switch {
	case !ok:
		var names []string
		for _, o := range r.plan.Tiers[:i] {
			names = append(names, shorten(o.Name))
		}
		r.fault(t.Stop.Line, field, written, "there is no tier of this name", "cut so far: "+several(names))
	case k >= i:
		r.fault(t.Stop.Line, field, written, "that tier is not cut yet",
			"move this tier after it, or stop by a tier that is cut before")
	}
}
