package cell

import "testing"

func TestText(t *testing.T) {
	for text, want := range map[string]string{
		"":                             "",
		"Harbour Eight":                "Harbour Eight",
		"P1 = P2":                      "P1 = P2",
		"-12.5e-3":                     "-12.5e-3",
		"+Inf":                         "+Inf",
		"=1+1":                         "'=1+1",
		"+1+1":                         "'+1+1",
		"-2+3+cmd|' /C calc'!A0":       "'-2+3+cmd|' /C calc'!A0",
		"@SUM(A1)":                     "'@SUM(A1)",
		"\t=1":                         "'\t=1",
		"\r=1":                         "'\r=1",
		" \n\x00=HYPERLINK(\"http:\")": "' \n\x00=HYPERLINK(\"http:\")",
		"＝1":                           "'＝1",
		"－":                            "'－",
	} {
		if got := Text(text); got != want {
			t.Errorf("%q became %q, want %q", text, got, want)
		}
	}
}
