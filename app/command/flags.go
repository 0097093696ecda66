package command

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"reflect"
	"slices"
	"strconv"
	"strings"

	"github.com/alecthomas/kong"

	"pavilight/app/stock"
	"pavilight/app/version"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// line is the whole command line.
type line struct {
	Help    helpFlag    `short:"h" help:"Show what a command does and takes."`
	Version versionFlag `help:"Print which version this is, and how it follows light on this machine."`
	JSON    bool        `name:"json" help:"Print the results as JSON."`

	Materials string `type:"word" placeholder:"FILE" help:"Materials of your own, a TOML file; without it materials.toml in Pavilight's folder of settings, if it is there."`

	Look  lookCommand  `cmd:"" help:"Show where the light goes: ledger and maps."`
	Check checkCommand `cmd:"" help:"Solve and measure the solid, and report every fault."`
	Tune  tuneCommand  `cmd:"" help:"Search for better angles, show the goal over two angles, tell what a machine's errors cost, or move a plan to another material."`
	Cut   cutCommand   `cmd:"" help:"Make the sheet for the bench: steps, drawings, sizes, cautions (PDF)."`
	Tell  tellCommand  `cmd:"" help:"Make the report for a client: what the light does, in plain words (PDF, HTML, data)."`
	Gems  gemsCommand  `cmd:"" help:"Print the material table, or all about one material, with sources."`
}

// call is what a command gets to run with.
type call struct {
	context.Context
	env  Environment
	out  io.Writer // results; printed when the command is done
	json bool

	library *gems.Library // of all materials at hand

	// inSweep says that this is one job of many: what is told must not depend on the
	// time it takes, and there is no progress of its own.
	inSweep bool
}

// progress returns what shows how far the command has come.
func (c call) progress() *progress {
	if c.inSweep {
		return newProgress(io.Discard, false)
	}
	return newProgress(c.env.bar, c.env.Terminal)
}

// warn prints a warning.
func (c call) warn(format string, args ...any) {
	fmt.Fprintf(c.env.Stderr, "pavilight: "+format+"\n", args...)
}

const description = `Shows where the light in a faceted gemstone goes.

Without a command, or with a PLAN alone, the window opens. A map is a model: it grades no stone
and replaces no laboratory.`

// run parses the arguments and runs what they ask for.
func run(ctx context.Context, args []string, env Environment, out io.Writer) error {
	if path, ok := windowAsked(args); ok {
		if err := env.Window(ctx, path); err != nil {
			return ownFault(err)
		}
		return context.Cause(ctx) // a window that a signal closed was stopped
	}
	var l line
	parser, err := newParser(&l, out, env.Stderr)
	if err != nil {
		return err
	}
	if err := knownCommand(args, parser.Model); err != nil {
		return err
	}
	k, err := parser.Parse(args)
	if errors.Is(err, errAnswered) {
		return nil
	}
	if err != nil {
		return commandFault(err)
	}
	library, err := stock.Open(l.Materials)
	if err != nil {
		return inputFault(err)
	}
	c := call{Context: ctx, env: env, out: out, json: l.JSON, library: library}
	if s := newSweeping(c, parser, &l, k); s != nil {
		return s.run()
	}
	return k.Run(c)
}

// newParser returns what reads a command line into l and prints help and answers to out.
func newParser(l *line, out, warnings io.Writer) (*kong.Kong, error) {
	return kong.New(l,
		kong.Name("pavilight"),
		kong.Description(description),
		kong.Writers(out, warnings),
		kong.NoDefaultHelp(),
		kong.Vars{
			"lights": strings.Join(trace.LightNames(), ", "), "illuminants": strings.Join(trace.IlluminantNames(), ", "),
			"outlines": strings.Join(facets.Outlines(), ", "),
		},
		kong.Bind(answer{out}),
		kong.ConfigureHelp(kong.HelpOptions{Compact: true, WrapUpperBound: 100}),
		kong.NamedMapper("number", kong.MapperFunc(decodeNumber)),
		kong.NamedMapper("word", kong.MapperFunc(decodeWord)),
	)
}

// Grammar returns all that the command line takes, for pages and programs that tell of
// it.
func Grammar() (*kong.Application, error) {
	parser, err := newParser(new(line), io.Discard, io.Discard)
	if err != nil {
		return nil, err
	}
	return parser.Model, nil
}

// windowAsked reports whether the arguments ask for the window, and on which file:
// none at all, or a plan or scan alone, as a desktop passes a file that was opened.
func windowAsked(args []string) (path string, ok bool) {
	switch len(args) {
	case 0:
		return "", true
	case 1:
		return args[0], !strings.HasPrefix(args[0], "-") && isStoneFile(args[0])
	default:
		return "", false
	}
}

// isStoneFile reports whether the path ends like a plan or a scan.
func isStoneFile(path string) bool {
	return slices.Contains([]string{".toml", ".stl", ".obj", ".ply"}, strings.ToLower(filepath.Ext(path)))
}

// knownCommand fails in words for a first word that is no command.
func knownCommand(args []string, model *kong.Application) error {
	first := slices.IndexFunc(args, func(a string) bool { return !strings.HasPrefix(a, "-") })
	if first < 0 {
		return nil
	}
	var names []string
	for _, node := range model.Children {
		names = append(names, node.Name)
	}
	if slices.Contains(names, args[first]) {
		return nil
	}
	known := strings.Join(names, ", ")
	if isStoneFile(args[first]) {
		return commandFaultf("a command must come before %s: one of %s", args[first], known)
	}
	return commandFaultf("there is no command %q; the commands are %s", args[first], known)
}

// helpFlag prints the help of the command it stands with.
type helpFlag bool

// IgnoreDefault keeps the flag from being reset to a default, which would be a use.
func (helpFlag) IgnoreDefault() {}

// errAnswered ends parsing once a flag has answered by itself.
var errAnswered = errors.New("the flag has answered")

// BeforeReset prints help before anything else on the command line is judged.
func (helpFlag) BeforeReset(k *kong.Context) error {
	if err := k.PrintUsage(false); err != nil {
		return err
	}
	return errAnswered
}

// versionFlag prints which build of the program this is.
type versionFlag bool

// IgnoreDefault keeps the flag from being reset to a default, which would be a use.
func (versionFlag) IgnoreDefault() {}

// answer is where a flag prints that answers by itself.
type answer struct{ io.Writer }

// BeforeReset prints it before anything else on the command line is judged.
func (versionFlag) BeforeReset(k *kong.Context, to answer) error {
	build := version.Current()
	if slices.Contains(k.Args, "--json") {
		if err := printJSON(to, build); err != nil {
			return err
		}
		return errAnswered
	}
	if _, err := fmt.Fprintln(to, build); err != nil {
		return err
	}
	return errAnswered
}

// decodeNumber reads a number that must lie between the flag's tags least and most,
// and be whole for a flag of an integer type. A leading minus is part of it.
func decodeNumber(k *kong.DecodeContext, target reflect.Value) error {
	token := k.Scan.Pop()
	text := token.String()
	if token.IsEOL() {
		return errors.New("a number must follow")
	}
	tag := k.Value.Tag
	allowed := fmt.Sprintf("use %s to %s", tag.Get("least"), tag.Get("most"))
	if unit := tag.Get("unit"); unit != "" {
		allowed += " " + unit
	}
	switch target.Kind() {
	case reflect.Float64:
		v, err := strconv.ParseFloat(text, 64)
		if err != nil && !errors.Is(err, strconv.ErrRange) {
			return fmt.Errorf("%q is not a number; %s", text, allowed)
		}
		least, most, err := bounds(tag, func(s string) (float64, error) { return strconv.ParseFloat(s, 64) })
		if err != nil {
			return err
		}
		if !(v >= least && v <= most) { // the negation catches NaN too
			return fmt.Errorf("%s is out of range; %s", text, allowed)
		}
		target.SetFloat(v)
	case reflect.Int:
		v, err := strconv.Atoi(text)
		if err != nil && !errors.Is(err, strconv.ErrRange) {
			return fmt.Errorf("%q is not a whole number; %s", text, allowed)
		}
		least, most, err := bounds(tag, strconv.Atoi)
		if err != nil {
			return err
		}
		if v < least || v > most {
			return fmt.Errorf("%s is out of range; %s", text, allowed)
		}
		target.SetInt(int64(v))
	case reflect.Uint64:
		v, err := strconv.ParseUint(text, 10, 64)
		if err != nil {
			return fmt.Errorf("%q is not a whole number from 0 to 18446744073709551615", text)
		}
		target.SetUint(v)
	default:
		return fmt.Errorf("no number fits a %s", target.Kind())
	}
	return nil
}

// bounds reads the tags least and most.
func bounds[T any](tag *kong.Tag, parse func(string) (T, error)) (least, most T, err error) {
	if least, err = parse(tag.Get("least")); err != nil {
		return least, most, err
	}
	most, err = parse(tag.Get("most"))
	return least, most, err
}

// decodeWord reads a value that must not be empty nor look like a flag, so that a
// forgotten value does not swallow the next flag.
func decodeWord(k *kong.DecodeContext, target reflect.Value) error {
	token := k.Scan.Pop()
	text := token.String()
	flag := token.InferredType().IsAny(kong.FlagToken, kong.ShortFlagToken)
	if flag && len(text) > 1 && strings.ContainsRune(".0123456789", rune(text[1])) {
		flag = false // a number below 0 begins the value, as in -20..20/10
	}
	if token.IsEOL() || text == "" || flag {
		return errors.New("a value must follow")
	}
	target.SetString(text)
	return nil
}
