package settings

import "go.yaml.in/yaml/v3"

// pairs gives keys and values of a mapping, those of merged mappings (<<) after its own. Its own keys override merged ones, and a mapping
// merged earlier overrides a later one.
func (d *decoder) pairs(n *yaml.Node, path string) [][2]*yaml.Node {
	if d.merging[n] {
		d.fault(n, joined(path, "<<"), "a group of keys that is merged into itself", "groups that do not hold one another", "")
		return nil
	}
	if d.merging == nil {
		d.merging = map[*yaml.Node]bool{}
	}
	d.merging[n] = true
	defer delete(d.merging, n)
	var own, merged [][2]*yaml.Node
	for i := 0; i+1 < len(n.Content); i += 2 {
		key, value := n.Content[i], n.Content[i+1]
		if key.Kind == yaml.AliasNode { // the text of the anchor, in its own place
			here := *key.Alias
			here.Line, here.Column = key.Line, key.Column
			key = &here
		}
		switch {
		case key.Kind != yaml.ScalarNode:
			d.fault(key, path, "a key that is not a word", "words as keys", "")
		case key.Tag != "!!merge":
			own = append(own, [2]*yaml.Node{key, value})
		default:
			merged = append(merged, d.merged(value, path, true)...)
		}
	}
	have := make(map[string]bool, len(own))
	for _, pair := range own {
		have[pair[0].Value] = true
	}
	for _, pair := range merged {
		if name := pair[0].Value; !have[name] {
			have[name] = true
			own = append(own, pair)
		}
	}
	return own
}

// merged gives the pairs that the value of a merge key brings: a mapping, or a list of mappings.
func (d *decoder) merged(value *yaml.Node, path string, list bool) [][2]*yaml.Node {
	if !d.room(value, path) {
		return nil
	}
	if value.Kind == yaml.AliasNode {
		value = value.Alias
	}
	if value.Kind == yaml.MappingNode {
		for range len(value.Content) / 2 {
			if !d.room(value, path) {
				return nil
			}
		}
		return d.pairs(value, path)
	}
	if value.Kind == yaml.SequenceNode && list {
		var all [][2]*yaml.Node
		for _, item := range value.Content {
			all = append(all, d.merged(item, path, false)...)
		}
		return all
	}
	d.fault(value, joined(path, "<<"), "not a group of keys but "+kindOf(value), "an alias of a group of keys, or a list of such", "")
	return nil
}
