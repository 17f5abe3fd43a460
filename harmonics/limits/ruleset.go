package limits

// A RuleSet is one edition of one limit document.
type RuleSet struct {
	Name string
}
