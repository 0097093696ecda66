//go:build !unix && !windows

package disk

// troubleOf knows no numbers here.
func troubleOf(error) trouble { return otherTrouble }
