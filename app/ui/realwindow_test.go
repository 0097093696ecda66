package ui

import (
	"bufio"
	"bytes"
	"errors"
	"flag"
	"fmt"
	"image"
	"image/png"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"
)

// pictures is where the run of the real window leaves its screenshots.
var pictures = flag.String("screenshots", "", "folder for screenshots of the real window; empty for none")

// patience is how long the real window may take over one stage on a busy machine
// with software OpenGL.
const patience = 60 * time.Second

// screen is a virtual display with nobody else on it.
type screen struct {
	t       *testing.T
	display string
}

// newScreen starts one, or skips the test in words where that cannot be.
func newScreen(t *testing.T, width, height int) *screen {
	t.Helper()
	if testing.Short() {
		t.Skip("the real window takes some seconds; run without -short")
	}
	for _, tool := range []string{"Xvfb", "xdotool"} {
		if _, err := exec.LookPath(tool); err != nil {
			t.Skipf("%s is not installed, so the real window is not tried (Debian: apt install xvfb xdotool)", tool)
		}
	}
	reader, writer, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	defer reader.Close()
	server := exec.Command("Xvfb", "-displayfd", "3", "-screen", "0", fmt.Sprintf("%dx%dx24", width, height), "-nolisten", "tcp", "-noreset")
	server.ExtraFiles = []*os.File{writer}
	if err := server.Start(); err != nil {
		t.Fatal(err)
	}
	writer.Close()
	t.Cleanup(func() { server.Process.Kill(); server.Wait() })
	number, err := bufio.NewReader(reader).ReadString('\n')
	if err != nil {
		t.Fatal("the virtual display did not start: ", err)
	}
	return &screen{t, ":" + strings.TrimSpace(number)}
}

// do moves the pointer and types, in xdotool's words.
func (s *screen) do(args ...string) {
	s.t.Helper()
	c := exec.Command("xdotool", args...)
	c.Env = append(os.Environ(), "DISPLAY="+s.display)
	if out, err := c.CombinedOutput(); err != nil {
		s.t.Fatalf("xdotool %v: %v\n%s", args, err, out)
	}
}

// shot takes a screenshot, if any are wanted, and tells how many colours it has.
func (s *screen) shot(name string) int {
	s.t.Helper()
	c := exec.Command("import", "-window", "root", "png:-")
	c.Env = append(os.Environ(), "DISPLAY="+s.display)
	out, err := c.Output()
	if errors.Is(err, exec.ErrNotFound) {
		s.t.Log("ImageMagick's import is not installed: no screenshots")
		return -1
	}
	if err != nil {
		s.t.Fatal("import: ", err)
	}
	if *pictures != "" {
		if err := os.WriteFile(filepath.Join(*pictures, name+".png"), out, 0o644); err != nil {
			s.t.Fatal(err)
		}
	}
	img, err := png.Decode(bytes.NewReader(out))
	if err != nil {
		s.t.Fatal(err)
	}
	return colours(img)
}

func colours(img image.Image) int {
	seen := map[[3]uint32]bool{}
	for y := img.Bounds().Min.Y; y < img.Bounds().Max.Y; y++ {
		for x := img.Bounds().Min.X; x < img.Bounds().Max.X; x++ {
			r, g, b, _ := img.At(x, y).RGBA()
			seen[[3]uint32{r, g, b}] = true
		}
	}
	return len(seen)
}

// program is the built program, running.
type program struct {
	t      *testing.T
	screen *screen
	cmd    *exec.Cmd
	stages chan string

	patience time.Duration // with one stage
	began    time.Time     // when it was started

	mu     sync.Mutex
	log    strings.Builder
	places map[string][2]string
	states []string // that the window told when it was asked
}

var build = sync.OnceValues(func() (string, error) {
	folder, err := os.MkdirTemp("", "pavilight")
	if err != nil {
		return "", err
	}
	binary := filepath.Join(folder, "pavilight")
	if out, err := exec.Command("go", "build", "-o", binary, "pavilight/app").CombinedOutput(); err != nil {
		return "", fmt.Errorf("%w\n%s", err, out)
	}
	return binary, nil
})

// start runs the program on the screen in a home of its own, with the given theme.
func (s *screen) start(theme brightness, width, height int, home string, args ...string) *program {
	s.t.Helper()
	binary, err := build()
	if err != nil {
		s.t.Fatal(err)
	}
	folder := filepath.Join(home, ".config", "fyne", appID)
	settings := fmt.Sprintf(`{"%s":true,"%s":"%s","%s":%d,"%s":%d}`, hintsKey, themeKey, theme, widthKey, width, heightKey, height)
	if err := errors.Join(os.MkdirAll(folder, 0o700),
		os.WriteFile(filepath.Join(folder, "preferences.json"), []byte(settings), 0o600)); err != nil {
		s.t.Fatal(err)
	}
	p := &program{t: s.t, screen: s, patience: patience, began: time.Now(), stages: make(chan string, 1000), places: map[string][2]string{}}
	p.cmd = exec.Command(binary, args...)
	p.cmd.Env = append(os.Environ(), "DISPLAY="+s.display, "WAYLAND_DISPLAY=", "HOME="+home, "XDG_CONFIG_HOME="+filepath.Join(home, ".config"),
		"XDG_CACHE_HOME="+filepath.Join(home, ".cache"), "LANG=en_US.UTF-8", stagesVariable+"="+checkThreads)
	errs, err := p.cmd.StderrPipe()
	if err == nil {
		err = p.cmd.Start()
	}
	if err != nil {
		s.t.Fatal(err)
	}
	go p.listen(errs)
	s.t.Cleanup(func() { p.cmd.Process.Kill(); p.cmd.Wait() })
	p.until("shown")
	p.focus()
	return p
}

func (p *program) listen(from io.Reader) {
	lines := bufio.NewScanner(from)
	for lines.Scan() {
		text := lines.Text()
		p.mu.Lock()
		p.log.WriteString(text + "\n")
		words := strings.Fields(text)
		if len(words) > 3 && words[0] == "PLACE" {
			n := len(words)
			p.places[strings.Join(words[1:n-2], " ")] = [2]string{words[n-2], words[n-1]}
		}
		if len(words) > 1 && words[0] == "STATE" {
			p.states = append(p.states, text)
		}
		p.mu.Unlock()
		if len(words) > 1 && words[0] == "READY" {
			p.stages <- words[1]
		}
	}
	close(p.stages)
}

// until waits for the window to tell stages, all of them and in whatever order.
func (p *program) until(stages ...string) {
	p.t.Helper()
	timer := time.After(p.patience)
	for len(stages) > 0 {
		select {
		case told, open := <-p.stages:
			stages = slices.DeleteFunc(slices.Clone(stages), func(stage string) bool { return stage == told })
			if !open {
				p.t.Fatalf("the program ended before %q:\n%s", stages, p.said())
			}
		case <-timer:
			p.t.Fatalf("waited %v in vain for %q:\n%s", p.patience, stages, p.said())
		}
	}
}

func (p *program) said() string {
	p.mu.Lock()
	defer p.mu.Unlock()
	return p.log.String()
}

// forget drops the stages that were told so far.
func (p *program) forget() {
	for {
		select {
		case _, open := <-p.stages:
			if !open {
				return
			}
		default:
			return
		}
	}
}

// focus gives the window the keyboard: there is no window manager to do it.
func (p *program) focus() {
	p.t.Helper()
	c := exec.Command("xdotool", "search", "--name", "Pavilight")
	c.Env = append(os.Environ(), "DISPLAY="+p.screen.display)
	out, err := c.Output()
	if err != nil {
		p.t.Fatal("no window: ", err)
	}
	id, _, _ := strings.Cut(string(out), "\n")
	p.screen.do("windowmove", id, "0", "0")
	p.screen.do("windowfocus", "--sync", id)
}

// place returns where the window said that a thing is.
func (p *program) place(name string) (x, y string) {
	p.t.Helper()
	for began := time.Now(); time.Since(began) < p.patience; time.Sleep(10 * time.Millisecond) {
		p.mu.Lock()
		at, ok := p.places[name]
		p.mu.Unlock()
		if ok { // places are told a little after the stage that they belong to
			return at[0], at[1]
		}
	}
	p.t.Fatalf("the window tells no place of %q", name)
	return "", ""
}

func (p *program) click(name string) {
	p.t.Helper()
	x, y := p.place(name)
	p.screen.do("mousemove", x, y, "click", "1")
}

// ended waits for the program's end and checks that it was a clean one.
func (p *program) ended() {
	p.t.Helper()
	done := make(chan error, 1)
	go func() {
		for range p.stages { // until its output ends
		}
		done <- p.cmd.Wait()
	}()
	select {
	case err := <-done:
		if err != nil {
			p.t.Errorf("the program ended with %v:\n%s", err, p.said())
		}
	case <-time.After(patience):
		p.t.Fatalf("the program did not end within %v:\n%s", patience, p.said())
	}
	for _, bad := range []string{"Error in Fyne call thread", "panic", "DATA RACE", "HELD "} {
		if strings.Contains(p.said(), bad) {
			p.t.Errorf("the program says %q:\n%s", bad, p.said())
		}
	}
}

// leastColours is what a window with six maps shows by far; an empty one has a few.
const leastColours = 300

// copyPlan puts a fresh copy of a sample into the folder.
func copyPlan(t *testing.T, name, folder string) {
	t.Helper()
	text, err := os.ReadFile(filepath.Join("../../testdata/plans", name))
	if err == nil {
		err = os.WriteFile(filepath.Join(folder, name), text, 0o600)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// TestRealWindow opens, types, drags, undoes, saves and closes as a person does.
func TestRealWindow(t *testing.T) {
	s := newScreen(t, 1360, 860)
	text, err := os.ReadFile("../../testdata/plans/round.toml")
	if err != nil {
		t.Fatal(err)
	}
	home := t.TempDir()
	path := filepath.Join(home, "mine.toml")
	if err := os.WriteFile(path, text, 0o600); err != nil {
		t.Fatal(err)
	}
	p := s.start(inDark, 1360, 860, home, path)
	p.until("opened")
	p.until("refined") // of the plan that was named
	if n := s.shot("dark"); n >= 0 && n < leastColours {
		t.Errorf("the window shows %d colours", n)
	}

	p.click("field P1")
	s.do("type", "--delay", "40", "41,8")
	s.do("key", "Return")
	p.until("refined")
	x, y := p.place("slider C3")
	s.do("mousemove", x, y, "mousedown", "1")
	across, err := strconv.Atoi(x)
	if err != nil {
		t.Fatal(err)
	}
	for _, d := range []int{2, 4, 6, 8} {
		s.do("mousemove", strconv.Itoa(across+d), y)
		time.Sleep(20 * time.Millisecond) // a hand's pace, so that the drag is seen as one
	}
	s.do("mouseup", "1")
	p.until("refined")
	s.do("key", "ctrl+z") // the drag
	p.until("refined")
	for _, keys := range []string{"ctrl+shift+z", "ctrl+z"} {
		s.do("key", keys)
		p.until("refined")
	}
	s.do("key", "ctrl+s")
	p.until("saved")
	saved, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if want := strings.Replace(string(text), "angle = 41.5", "angle = 41.8", 1); string(saved) != want {
		t.Errorf("the file holds\n%s\nwant the typed angle alone changed", saved)
	}

	p.click("map 0 0")
	p.until("followed")
	s.shot("ray")
	// A second ray beside it, in water; true colour, in one column under another light; a tip.
	p.click("beside")
	s.do("key", "Down", "Down", "Return")
	p.until("followed")
	s.shot("beside")
	p.click("row 0")
	s.do("key", "Up", "Return") // true colour is the last
	p.until("refined")
	p.click("medium 1")
	s.do("key", "Up", "Right", "Down", "Return") // the last opens the lights, of which even is the first
	p.until("refined")
	x, y = p.place("solid")
	s.do("mousemove", x, y)
	x, y = p.place("room Tune")
	s.do("mousemove", x, y)
	p.until("tip")
	s.shot("lights")
	p.click("row 0")
	s.do("key", "Down", "Return")

	p.click("field P1")
	s.do("type", "--delay", "40", "40")
	s.do("key", "Return")
	p.until("refined")
	s.do("key", "ctrl+q")
	p.until("asked")
	s.shot("asked")
	p.click("answer Discard")
	p.ended()
	if again, _ := os.ReadFile(path); string(again) != string(saved) {
		t.Error("the file changed although the changes were discarded")
	}
}

// TestRealWindowKeepsTheStone names a file that is no plan: words, and a stone.
func TestRealWindowKeepsTheStone(t *testing.T) {
	s := newScreen(t, 1024, 700)
	home := t.TempDir()
	path := filepath.Join(home, "rubbish.toml")
	if err := os.WriteFile(path, []byte("plan = 1\nname = \"x\"\ngear = \"many\"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	p := s.start(inLight, 1024, 700, home, path)
	p.until("refused")
	if !strings.Contains(p.said(), "READY refined") {
		p.until("refined")
	}
	if n := s.shot("refused"); n >= 0 && n < leastColours {
		t.Errorf("the window shows %d colours: is the bundled stone there?", n)
	}
	s.do("key", "Escape")
	s.do("key", "ctrl+q")
	p.ended()
}
