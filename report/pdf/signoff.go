package pdf

import "wavetally/report/chart"

// signOff is where two people put their names to the survey.
func (d *document) signOff() []block {
	intro := "The signatures confirm that the hook-up, the declared data and the doubts above were checked. The verdicts hold for the recorded period, state and point only."
	out := d.item("", intro, "", 6)
	out[len(out)-1].keep = true
	const height, rowHeight = 108.0, 23.0
	lines := fixedBlock(10, height, func(y, h float64) {
		width := (d.full() - 2*gutter) / 2
		d.signer(d.left, y, width, rowHeight, "Surveyed by", d.s.Site.Site.SurveyedBy)
		d.signer(d.left+width+2*gutter, y, width, rowHeight, "Reviewed by responsible engineer", "")
	})
	return append(out, lines)
}

// signer is one column of lines to sign on.
func (d *document) signer(x, y, width, rowHeight float64, role, name string) {
	p := d.pen
	p.text(headFace, chart.Ink, x, y+8, role)
	for i, label := range []string{"Name", "Licence no.", "Date", "Signature"} {
		at := y + 8 + float64(i+1)*rowHeight
		p.text(tinyFace, chart.Faint, x, at-2, label)
		p.rule(chart.Faint, 0.5, x+52, x+width, at)
		if i == 0 && name != "" {
			p.text(tableFace, chart.Ink, x+55, at-3, shorten(p.measure, tableFace, name, width-58))
		}
	}
}
