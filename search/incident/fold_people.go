package incident

import (
	"slices"
	"sort"

	"wakeback/drift/nav"
)

// DefaultObject is the leeway class of a person of whom nothing more is known.
const DefaultObject = "person"

const (
	unknown = "unknown"
	yes     = "yes"
	no      = "no"
)

// personOf returns the person of a number, made on the first mention.
func (f *folder) personOf(n PersonNo, e *entry) *PersonState {
	p, ok := f.persons[n]
	if !ok {
		p = &PersonState{
			No: n, Status: InWater, StatusAt: e.At, LifeJacket: unknown, Moving: unknown,
			Light: unknown, BeaconWorn: unknown, Object: DefaultObject,
		}
		f.persons[n] = p
	}
	return p
}

func (f *folder) missing(e *entry, b *Missing) {
	n := b.Person.Or(1)
	p, known := f.persons[n]
	if !known {
		p = f.personOf(n, e)
		p.Status = IsMissing
	}
	if len(b.Path) > 0 {
		p.Path = b.Path
	}
	f.windows[n] = append(f.windows[n], e)
}

func (f *folder) seen(e *entry, b *Seen) {
	lost := e.Kind == KindLostSight
	f.s.Sightings = append(f.s.Sightings, Sighting{Said: e.said(), Lost: lost, Seen: *b})
	p := f.personOf(b.Person.Or(1), e)
	p.InSight, p.SightAt = !lost, e.At
	if !lost {
		f.signs = append(f.signs, sign{at: e.At, device: e.Device})
	}
}

func (f *folder) person(e *entry, b *Person) {
	p := f.personOf(b.Person.Or(1), e)
	p.Name = b.Name.Or(p.Name)
	p.LifeJacket = b.LifeJacket.Or(p.LifeJacket)
	p.Clothing = b.Clothing.Or(p.Clothing)
	p.Moving = b.Moving.Or(p.Moving)
	p.Injuries = b.Injuries.Or(p.Injuries)
	p.Object = b.Object.Or(p.Object)
	p.Light = yesNo(b.Light, p.Light)
	p.BeaconWorn = yesNo(b.Beacon, p.BeaconWorn)
}

func yesNo(v nav.Opt[bool], before string) string {
	b, ok := v.Get()
	switch {
	case !ok:
		return before
	case b:
		return yes
	}
	return no
}

// ofPerson: attached and alongside are not aboard; parted is back in the water.
func (f *folder) ofPerson(e *entry, b *OfPerson) {
	p := f.personOf(b.Person.Or(1), e)
	if p.Status == IsAboard && e.Kind != KindParted {
		return
	}
	p.StatusAt = e.At
	switch e.Kind {
	case KindAttached:
		p.Status = Attached
	case KindAlongside:
		p.Status = Alongside
	case KindParted:
		p.Status, p.Condition = InWater, ""
	}
}

func (f *folder) aboard(e *entry, b *Aboard) {
	p := f.personOf(b.Person.Or(1), e)
	p.Status, p.StatusAt, p.Condition = IsAboard, e.At, b.Condition
}

func (f *folder) missedPass(e *entry, b *MissedPass) {
	p := f.personOf(b.Person.Or(1), e)
	p.MissedPasses = append(p.MissedPasses, Pass{e.said(), len(p.MissedPasses) + 1, *b})
}

// finishPersons chooses the working marks, narrows the windows, and leaves
// out people of whom only dismissed marks spoke.
func (f *folder) finishPersons() {
	for n, p := range f.persons {
		p.WorkingMark = f.working(n)
		p.Window = f.window(n)
		if !p.WorkingMark.IsSet() && f.onlyDismissed(n) && !p.Window.IsSet() && !p.Beacon.IsSet() {
			continue
		}
		f.s.Persons = append(f.s.Persons, *p)
	}
	sort.Slice(f.s.Persons, func(i, j int) bool { return f.s.Persons[i].No < f.s.Persons[j].No })
}

// working is the mark chosen, or the first that was not dismissed.
func (f *folder) working(n PersonNo) nav.Opt[EventID] {
	var first nav.Opt[EventID]
	for _, m := range f.s.Marks {
		if m.Person != n || m.Dismissed.IsSet() {
			continue
		}
		if m.Event == f.chosen[n] {
			return nav.Some(m.Event)
		}
		if !first.IsSet() {
			first = nav.Some(m.Event)
		}
	}
	return first
}

func (f *folder) onlyDismissed(n PersonNo) bool {
	return slices.ContainsFunc(f.s.Marks, func(m Mark) bool { return m.Person == n })
}

// window puts together the last report of a missing person and every clue
// about the time. A clue that leaves no time over against the ones before it
// is listed as being against them and narrows nothing.
func (f *folder) window(n PersonNo) nav.Opt[Window] {
	var w Window
	for _, e := range f.windows[n] {
		if b, ok := e.body.(*Missing); ok {
			w.LastSeen, w.Noticed = b.LastSeen, b.Noticed
		}
	}
	if w.Noticed.IsZero() {
		return nav.None[Window]()
	}
	w.From, w.To = w.LastSeen, w.Noticed
	for _, e := range f.windows[n] {
		b, ok := e.body.(*Clue)
		if !ok || !b.NotBefore.IsSet() && !b.NotAfter.IsSet() {
			continue
		}
		from, to := w.From, w.To
		if t, ok := b.NotBefore.Get(); ok && t.After(from) {
			from = t
		}
		if t, ok := b.NotAfter.Get(); ok && t.Before(to) {
			to = t
		}
		if to.Before(from) {
			w.Against = append(w.Against, e.ID)
			continue
		}
		w.From, w.To = from, to
	}
	return nav.Some(w)
}
