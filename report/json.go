package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
)

// WriteJSON writes survey.json: indented, the same bytes for the same survey.
func WriteJSON(w io.Writer, s *Survey) error {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetIndent("", "  ")
	enc.SetEscapeHTML(false)
	if err := enc.Encode(s); err != nil {
		return fmt.Errorf("survey.json: %w", err)
	}
	_, err := w.Write(b.Bytes())
	return err
}

// ReadJSON reads what WriteJSON wrote. What only the measurement itself has, such as the series behind the charts, is
// not in the file and stays nil.
func ReadJSON(r io.Reader) (*Survey, error) {
	s := &Survey{}
	dec := json.NewDecoder(r)
	if err := dec.Decode(s); err != nil {
		return nil, fmt.Errorf("not a survey: %w", err)
	}
	if _, err := dec.Token(); err != io.EOF {
		return nil, errors.New("not a survey: something follows after the survey")
	}
	if s.Schema != Schema {
		return nil, fmt.Errorf("its schema is %q, this program reads %q", s.Schema, Schema)
	}
	return s, nil
}
