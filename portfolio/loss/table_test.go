package loss

import (
	"slices"
	"testing"
)

// TestReordered: years change places with all their rows, and twice the same exchange gives the table back.
func TestReordered(t *testing.T) {
	b := NewBuilder(3, []string{"a", "b"})
	for _, r := range []Row{{Year: 1, Event: "1", Class: "a", Peril: "wind", Loss: 5}, {Year: 1, Class: "b", Loss: 1}, {Year: 3, Event: "2", Class: "b", Peril: "fire", Risk: "9", Loss: 7}} {
		if err := b.Add(r); err != nil {
			t.Fatal(err)
		}
	}
	table, err := b.Build()
	if err != nil {
		t.Fatal(err)
	}
	turned := table.Reordered([]int32{2, 1, 0})
	c := turned.Columns()
	if turned.Years() != 3 || turned.Len() != 3 || !slices.Equal(c.Offset, []int{0, 1, 1, 3}) || c.Loss[0] != 7 || c.Risk[0] == NoRisk || turned.Perils()[c.Peril[0]] != "fire" || c.Event[0] == NoEvent {
		t.Errorf("%+v", c)
	}
	back, was := turned.Reordered([]int32{2, 1, 0}).Columns(), table.Columns()
	if !slices.Equal(back.Loss, was.Loss) || !slices.Equal(back.Offset, was.Offset) || !slices.Equal(back.Class, was.Class) || !slices.Equal(back.Event, was.Event) ||
		!slices.Equal(back.Peril, was.Peril) || !slices.Equal(back.Risk, was.Risk) {
		t.Errorf("%+v, want %+v", back, was)
	}
}
