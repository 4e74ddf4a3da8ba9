package treaty

import "fmt"

// validatePanel reports every fault of the panel at once. Whether its reinsurers are known is not the treaty's to say.
func (t Treaty) validatePanel(add func(key string, found any, allowed string)) {
	seen := map[string]bool{}
	sum := 0.0
	for i, line := range t.Panel {
		key := fmt.Sprintf("panel[%d].", i)
		switch {
		case line.Reinsurer == "":
			add(key+"reinsurer", "no name", "the name of a reinsurer")
		case seen[line.Reinsurer]:
			add(key+"reinsurer", fmt.Sprintf("%q twice", line.Reinsurer), "one line for each reinsurer of a treaty")
		}
		seen[line.Reinsurer] = true
		if line.Share > 0 && line.Share <= 1 {
			sum += line.Share // a share that is wrong in itself is not blamed twice
		} else {
			add(key+"share", line.Share, "a fraction of what is placed, above 0 and at most 1")
		}
		if !money(line.Collateral) {
			add(key+"collateral", line.Collateral, "money of at least 0")
		}
	}
	if sum > 1+shareRounding {
		add("panel", fmt.Sprintf("its lines come to %.6g %%", 100*sum), "at most 100 % of what is placed")
	}
}

// Unnamed gives the fraction of what is placed for which the panel names no reinsurer, taken as free of default: 1 for a treaty without a
// panel, 0 where the lines make 100 % to 1e-9.
func (t Treaty) Unnamed() float64 {
	unnamed := 1.0
	for _, line := range t.Panel {
		unnamed -= line.Share
	}
	if unnamed < shareRounding {
		return 0
	}
	return unnamed
}
