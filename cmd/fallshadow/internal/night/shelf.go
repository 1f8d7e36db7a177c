package night

import (
	"image"
	"slices"
)

// keptBenches is how many benches of drawn regions a night keeps; shots that follow each
// other share a region, so that more would only hold memory.
const keptBenches = 4

// shelf keeps what is made for regions: that of the settings' region and of Everything, and
// those of the other regions, at most so many, that were last asked for.
type shelf[T any] struct {
	most   int
	made   map[image.Rectangle]T
	recent []image.Rectangle // of the others, the last one asked for at the end
}

func (s *shelf[T]) get(region image.Rectangle) (T, bool) {
	v, ok := s.made[region]
	if i := slices.Index(s.recent, region); i >= 0 {
		s.recent = append(slices.Delete(s.recent, i, i+1), region)
	}
	return v, ok
}

func (s *shelf[T]) put(region image.Rectangle, v T) {
	if s.made == nil {
		s.made = map[image.Rectangle]T{}
	}
	_, again := s.get(region)
	s.made[region] = v
	if again || region.Empty() || region == Everything {
		return
	}
	s.recent = append(s.recent, region)
	for len(s.recent) > s.most {
		delete(s.made, s.recent[0])
		s.recent = slices.Delete(s.recent, 0, 1)
	}
}
