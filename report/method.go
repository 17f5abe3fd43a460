package report

// A MethodItem says how one thing was done, and which clause of which document says so.
type MethodItem struct {
	Topic  string `json:"topic"`
	Text   string `json:"text"`
	Source string `json:"source"`
}
