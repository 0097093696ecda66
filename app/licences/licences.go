// Package licences holds the licences of everything by others that is part of the
// built program: the text that its packages carry and that the window shows.
package licences

import _ "embed"

// ThirdParty returns the licence texts, a part for each module, its version and the
// systems on whose builds it is linked. The text is made from the modules themselves
// by go run ./app/packaging licences, and a test of that package holds it to them.
func ThirdParty() string { return thirdParty }

//go:embed third-party.txt
var thirdParty string
