package xlsx

// measuredSheets are what was measured: statistics, spectra, power, charts with their numbers, and the series.
func (b *book) measuredSheets(verdicts []verdictRange) {
	b.statisticsSheet(b.sheet("Statistics", "channels, totals and days"))
	b.spectrumSheets()
	charts := b.sheet("Charts", "charts of spectra, totals and waveforms; where every chart's numbers stand")
	p := &plotter{book: b, verdicts: verdicts, at: map[string]*plotted{}}
	p.spectra()
	p.waveforms()
	p.heatMaps()
	p.spectrograms()
	b.powerSheet(b.sheet("Power", "power after IEEE 1459-2010, unbalance, sequences, neutral, phasors"), p)
	if _, ok := b.tables["plant"]; ok {
		b.single(b.sheet("Plant", "screening figures on transformer, neutral, cables, capacitors"), "plant")
	}
	b.seriesSheets(p)
	p.draw(charts)
}

// single writes one table on a sheet of its own, with its heads in sight.
func (b *book) single(s *sheet, key string) {
	t := b.tables[key]
	s.title(t.Title)
	first, _ := s.untitled(t)
	s.freeze(first-1, 0, 2)
}

// spectrumSheets are the long tables by order.
func (b *book) spectrumSheets() {
	for _, one := range []struct{ name, about, key string }{
		{"Spectrum", "every order of every channel, with its statistics", "spectrum"},
		{"Interharmonics", "every interharmonic centred subgroup of every channel", "interharmonics"},
	} {
		t, ok := b.tables[one.key]
		if !ok {
			continue
		}
		s := b.sheet(one.name, one.about)
		first, last := s.table(t)
		s.freeze(first-1, 2, first-2)
		s.filter = at(1, first-1) + ":" + at(len(t.Columns), last)
		b.name(one.name+"_data", s.span(1, first, len(t.Columns), last))
	}
}
