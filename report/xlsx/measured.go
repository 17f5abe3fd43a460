package xlsx

func (b *book) measuredSheets(verdicts []verdictRange) {}
