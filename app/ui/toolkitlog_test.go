package ui

import (
	"fmt"
	"strings"
	"testing"
)

func TestToolkitLogKeepsTheLastLines(t *testing.T) {
	var also strings.Builder
	l := &toolkitLog{also: &also}
	for i := range loggedLines + 5 {
		fmt.Fprintf(l, "line %d\n", i)
	}
	lines := strings.Split(l.String(), "\n")
	if len(lines) != loggedLines || lines[0] != "line 5" || lines[loggedLines-1] != fmt.Sprint("line ", loggedLines+4) {
		t.Errorf("%d lines are kept, from %q to %q", len(lines), lines[0], lines[len(lines)-1])
	}
	if !strings.HasPrefix(also.String(), "line 0\n") {
		t.Error("a script is not told")
	}
	var none *toolkitLog
	if none.String() != "" {
		t.Error("no log has lines")
	}
}
