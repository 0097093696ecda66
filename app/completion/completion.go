// Package completion writes what makes a shell complete commands, flags and their
// values after Tab, from what the command line takes, so that it cannot be out of date.
package completion

import (
	"fmt"
	"slices"
	"strings"

	"github.com/alecthomas/kong"
)

// Files are the names that shells look for, with what writes them.
var Files = map[string]func(*kong.Application, Values) []byte{
	"pavilight.bash": Bash,
	"_pavilight":     Zsh,
	"pavilight.fish": Fish,
}

// Values are words that may follow a flag, by its name without hyphens, and by the name
// of a command those that may follow it. A flag that is not in it takes a file where
// its help calls for a FILE or a DIR, and what cannot be guessed otherwise.
type Values map[string][]string

// kind is what a shell offers after a flag.
type kind int

const (
	nothing kind = iota // the flag takes no value
	word                // that cannot be guessed
	file
	folder
	listed // one of Values
)

func (v Values) kindOf(f *kong.Flag) kind {
	switch place := f.FormatPlaceHolder(); {
	case f.IsBool():
		return nothing
	case v[f.Name] != nil:
		return listed
	case strings.Contains(place, "FILE"):
		return file
	case strings.Contains(place, "DIR"):
		return folder
	}
	return word
}

// flags returns a command's flags and those of the whole line, in the order of the help.
func flags(grammar *kong.Application, c *kong.Node) []*kong.Flag {
	return slices.DeleteFunc(slices.Concat(c.Flags, grammar.Flags), func(f *kong.Flag) bool { return f.Hidden })
}

// briefly is a help's first sentence, without what would need to be quoted in a shell.
func briefly(help string) string {
	help, _, _ = strings.Cut(help, ". ")
	help, _, _ = strings.Cut(help, ": ")
	help = strings.NewReplacer("'", "", `"`, "", "`", "", "$", "", "[", "(", "]", ")", ":", ",", `\`, "").Replace(help)
	return strings.TrimSuffix(help, ".")
}

func names(grammar *kong.Application) (all []string) {
	for _, c := range grammar.Children {
		all = append(all, c.Name)
	}
	return all
}

// Bash returns a completion for bash.
func Bash(grammar *kong.Application, values Values) []byte {
	var b strings.Builder
	b.WriteString("# Completion of pavilight for bash.\n_pavilight() {\n" +
		"\tlocal word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} command= w\n" +
		"\tCOMPREPLY=()\n" +
		"\tfor w in \"${COMP_WORDS[@]:1:COMP_CWORD-1}\"; do\n" +
		"\t\tcase $w in\n")
	fmt.Fprintf(&b, "\t\t%s) command=$w; break ;;\n\t\tesac\n\tdone\n", strings.Join(names(grammar), " | "))
	b.WriteString("\tcase $command/$before in\n")
	for _, c := range grammar.Children {
		for _, f := range flags(grammar, c) {
			at := fmt.Sprintf("\t%s/--%s)", c.Name, f.Name)
			switch values.kindOf(f) {
			case listed:
				fmt.Fprintf(&b, "%s mapfile -t COMPREPLY < <(compgen -W '%s' -- \"$word\"); return ;;\n", at, strings.Join(values[f.Name], " "))
			case file:
				fmt.Fprintf(&b, "%s mapfile -t COMPREPLY < <(compgen -f -- \"$word\"); return ;;\n", at)
			case folder:
				fmt.Fprintf(&b, "%s mapfile -t COMPREPLY < <(compgen -d -- \"$word\"); return ;;\n", at)
			case word:
				fmt.Fprintf(&b, "%s return ;;\n", at)
			}
		}
	}
	b.WriteString("\tesac\n\tcase $command/$word in\n")
	for _, c := range grammar.Children {
		var all []string
		for _, f := range flags(grammar, c) {
			all = append(all, "--"+f.Name)
		}
		fmt.Fprintf(&b, "\t%s/-*) mapfile -t COMPREPLY < <(compgen -W '%s' -- \"$word\") ;;\n", c.Name, strings.Join(all, " "))
		if v := values[c.Name]; v != nil {
			fmt.Fprintf(&b, "\t%s/*) mapfile -t COMPREPLY < <(compgen -W '%s' -- \"$word\") ;;\n", c.Name, strings.Join(v, " "))
		}
	}
	fmt.Fprintf(&b, "\t/*) mapfile -t COMPREPLY < <(compgen -W '%s' -- \"$word\"; compgen -f -- \"$word\") ;;\n",
		strings.Join(names(grammar), " "))
	b.WriteString("\t*) mapfile -t COMPREPLY < <(compgen -f -- \"$word\") ;;\n\tesac\n}\ncomplete -o filenames -F _pavilight pavilight\n")
	return []byte(b.String())
}

// Zsh returns a completion for zsh.
func Zsh(grammar *kong.Application, values Values) []byte {
	var b strings.Builder
	b.WriteString("#compdef pavilight\n# Completion of pavilight for zsh.\n_pavilight() {\n\tlocal -a commands\n\tcommands=(\n")
	for _, c := range grammar.Children {
		fmt.Fprintf(&b, "\t\t'%s:%s'\n", c.Name, briefly(c.Help))
	}
	b.WriteString("\t)\n\tif (( CURRENT == 2 )); then\n\t\t_describe command commands\n\t\t_files -g '*.(toml|stl|obj|ply)'\n\t\treturn\n\tfi\n" +
		"\tcase $words[2] in\n")
	for _, c := range grammar.Children {
		fmt.Fprintf(&b, "\t%s)\n\t\tshift words\n\t\t(( CURRENT-- ))\n\t\t_arguments \\\n", c.Name)
		for _, f := range flags(grammar, c) {
			action := map[kind]string{nothing: "", word: ": :", file: ": :_files", folder: ": :_files -/"}[values.kindOf(f)]
			if values.kindOf(f) == listed {
				action = ": :(" + strings.Join(values[f.Name], " ") + ")"
			}
			fmt.Fprintf(&b, "\t\t\t'--%s[%s]%s' \\\n", f.Name, briefly(f.Help), action)
		}
		if v := values[c.Name]; v != nil {
			fmt.Fprintf(&b, "\t\t\t'*: :(%s)'\n", strings.Join(v, " "))
		} else {
			b.WriteString("\t\t\t'*: :_files -g \"*.(toml|stl|obj|ply)\"'\n")
		}
		b.WriteString("\t\t;;\n")
	}
	b.WriteString("\tesac\n}\n_pavilight \"$@\"\n")
	return []byte(b.String())
}

// Fish returns a completion for fish.
func Fish(grammar *kong.Application, values Values) []byte {
	var b strings.Builder
	b.WriteString("# Completion of pavilight for fish.\n")
	for _, c := range grammar.Children {
		fmt.Fprintf(&b, "complete -c pavilight -n __fish_use_subcommand -a %s -d '%s'\n", c.Name, briefly(c.Help))
	}
	for _, c := range grammar.Children {
		in := fmt.Sprintf("complete -c pavilight -n '__fish_seen_subcommand_from %s'", c.Name)
		if v := values[c.Name]; v != nil {
			fmt.Fprintf(&b, "%s -f -a '%s'\n", in, strings.Join(v, " "))
		}
		for _, f := range flags(grammar, c) {
			takes := map[kind]string{nothing: "", word: " -x", file: " -r", folder: " -x -a '(__fish_complete_directories)'"}[values.kindOf(f)]
			if values.kindOf(f) == listed {
				takes = " -x -a '" + strings.Join(values[f.Name], " ") + "'"
			}
			fmt.Fprintf(&b, "%s -l %s%s -d '%s'\n", in, f.Name, takes, briefly(f.Help))
		}
	}
	return []byte(b.String())
}
