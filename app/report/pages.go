package report

import "pavilight/app/drawing"

// Pages returns the pages of paper of a report: of one stone, or of several side by side.
// They are those that PDF and ComparisonPDF write.
func Pages(all []*Findings, cover *Cover) ([]*drawing.Page, error) {
	var d *document
	var err error
	if len(all) == 1 {
		d, err = compose(all[0], cover)
	} else {
		d, err = composeComparison(all, cover)
	}
	if err != nil {
		return nil, err
	}
	return d.pages(), nil
}
