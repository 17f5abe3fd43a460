package report

func headlineOf(s *Survey) Headline { return Headline{} }
