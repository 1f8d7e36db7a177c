package watch

import (
	"maps"
	"slices"
	"sync"
)

// notes are what a person should know, one of a kind at a time.
type notes struct {
	told func([]string)

	mu   sync.Mutex
	text map[string]string
}

// set says something of a kind, or with no text that there is nothing any more.
func (n *notes) set(kind, text string) {
	n.mu.Lock()
	defer n.mu.Unlock()
	if n.text[kind] == text {
		return
	}
	if n.text == nil {
		n.text = map[string]string{}
	}
	if n.text[kind] = text; text == "" {
		delete(n.text, kind)
	}
	n.told(n.list())
}

func (n *notes) list() []string {
	list := make([]string, 0, len(n.text))
	for _, kind := range slices.Sorted(maps.Keys(n.text)) {
		list = append(list, n.text[kind])
	}
	return list
}
