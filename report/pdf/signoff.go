package pdf

import "wavetally/report/chart"

// signMeaning says what the signatures stand for.
const signMeaning = "The signatures confirm that the hook-up, the declared data and the doubts above were checked. The verdicts hold for the recorded period, state and point only."

// signOff is where two people put their names to the survey.
func (d *document) signOff() []block {
	const rowHeight = 21.5
	meaning := wrap(d.pen.measure, sideFace, signMeaning, d.side)
	height := max(9+4*rowHeight, textHeight(sideFace, len(meaning)))
	return []block{fixedBlock(6, height, func(y, h float64) {
		d.pen.lines(sideFace, chart.Faint, d.left, y, meaning)
		width := (d.main() - 2*gutter) / 2
		d.signer(d.mainX(), y, width, rowHeight, "Surveyed by", d.s.Site.Site.SurveyedBy)
		d.signer(d.mainX()+width+2*gutter, y, width, rowHeight, "Reviewed by responsible engineer", "")
	})}
}

// signer is one column of lines to sign on.
func (d *document) signer(x, y, width, rowHeight float64, role, name string) {
	const labelWidth = 46
	p := d.pen
	p.text(headFace, chart.Ink, x, y+8, role)
	for i, label := range []string{"Name", "Licence no.", "Date", "Signature"} {
		at := y + 8 + float64(i+1)*rowHeight
		p.text(tinyFace, chart.Faint, x, at-2, label)
		p.rule(chart.Faint, 0.5, x+labelWidth, x+width, at)
		if i == 0 && name != "" {
			p.text(tableFace, chart.Ink, x+labelWidth+3, at-3, shorten(p.measure, tableFace, name, width-labelWidth-6))
		}
	}
}
