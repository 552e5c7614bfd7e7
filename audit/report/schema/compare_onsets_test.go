package schema_test

import (
	"bytes"
	"testing"

	"fettle/audit/choose"
	"fettle/audit/report"
	"fettle/audit/report/schema"
	"fettle/filter/stream/machine"

	"github.com/santhosh-tekuri/jsonschema/v6"
)

// TestHeardComparisonFollowsItsSchema: with a recording of so few onsets that figures are not stated.
func TestHeardComparisonFollowsItsSchema(t *testing.T) {
	c, err := choose.Compare(choose.Request{
		Chains: []choose.Chain{chainOf(t, "stages: [highpass: {at: 300 Hz, order: 2}]\n")},
		Names:  []string{"iir"}, Rate: 16000, Kernel: machine.Portable,
		Recording: "../../../samples/recordings/interviews/deckhand_side_a.wav",
	})
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := report.CompareJSON(&b, c, "1.2.3"); err != nil {
		t.Fatal(err)
	}
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	s := compiled(t, schema.Compare)
	if err := s.Validate(doc); err != nil {
		t.Error(err)
	}
	mustRefuseChanges(t, s, b.Bytes())
}
