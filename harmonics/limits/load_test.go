package limits

import "testing"

func TestBuiltInRuleSetsParse(t *testing.T) {
	for _, name := range Names() {
		r, err := Load(name)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if r.Name != name {
			t.Errorf("%s calls itself %q", name, r.Name)
		}
	}
}
