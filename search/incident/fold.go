package incident

import (
	"slices"
	"sort"
	"time"

	"wakeback/drift/nav"
)

// folder builds the state of one incident from its events in order.
type folder struct {
	s      State
	real   bool // some event is neither drill nor test
	drill  bool // some event is a drill
	chosen map[PersonNo]EventID
	// early are events about a mark that stand before it in the log, because
	// two clocks differ; they are applied as soon as the mark is there.
	early map[EventID][]*entry
	// earlySearch is the same for events about a search that was not laid yet.
	earlySearch map[EventID][]*entry
	placed      map[EventID]Place
	persons     map[PersonNo]*PersonState
	windows     map[PersonNo][]*entry // missing reports and clues, in order
	roles       map[string]RoleHeld
	joined      map[IncidentID]bool
	signs       []sign // signs of a person that keep an incident open
	// decidedOn is the device on which the status was set.
	decidedOn DeviceID
}

func newFolder(id IncidentID) *folder {
	return &folder{
		s:           State{ID: id, Status: Open, Marks: []Mark{}, Persons: []PersonState{}},
		chosen:      make(map[PersonNo]EventID),
		early:       make(map[EventID][]*entry),
		earlySearch: make(map[EventID][]*entry),
		placed:      make(map[EventID]Place),
		persons:     make(map[PersonNo]*PersonState),
		windows:     make(map[PersonNo][]*entry),
		roles:       make(map[string]RoleHeld),
		joined:      make(map[IncidentID]bool),
	}
}

// fold counts one event. An event taken back only counts as having happened.
func (f *folder) fold(e *entry, undone bool) {
	if f.s.Events == 0 {
		f.s.OpenedAt = e.At
	}
	f.s.Events++
	f.s.LastAt = e.At
	f.real = f.real || !e.Drill && !e.Test
	f.drill = f.drill || e.Drill
	if e.Incident != f.s.ID {
		f.joined[e.Incident] = true
	}
	if undone {
		return
	}
	f.apply(e)
}

func (f *folder) apply(e *entry) {
	said := e.said()
	switch b := e.body.(type) {
	case *Marked:
		f.marked(e, b)
	case *MarkPlaced:
		f.markPlaced(b)
	case *MarkAdjusted:
		f.markAdjusted(e, b)
	case *MarkDismissed:
		f.markDismissed(e, b)
	case *WorkingMark:
		f.workingMark(e, b)
	case *Beacon:
		f.beacon(e, b)
	case *Missing:
		f.missing(e, b)
	case *Clue:
		f.s.Clues = append(f.s.Clues, ClueSaid{said, *b})
		no := b.Person.Or(1)
		f.windows[no] = append(f.windows[no], e)
	case *Seen:
		f.seen(e, b)
	case *Person:
		f.person(e, b)
	case *OfPerson:
		f.ofPerson(e, b)
	case *Aboard:
		f.aboard(e, b)
	case *MissedPass:
		f.missedPass(e, b)
	case *InCharge:
		f.inCharge(e, b)
	case *Role:
		f.roles[b.Role] = RoleHeld{said, b.Role, b.Name, b.Device}
	case *StoodDown:
		f.stoodDown(e, b)
	case *Order:
		f.order(e, b)
	case *SearchLaid, *LegBegun, *LegEnded, *SearchWord:
		f.search(e)
	default:
		f.keep(e)
	}
}

// keep counts the events that are only listed.
func (f *folder) keep(e *entry) {
	said := e.said()
	switch b := e.body.(type) {
	case *HeadCount:
		f.s.HeadCount = nav.Some(*b)
	case *WindObserved:
		f.s.Winds = append(f.s.Winds, WindSaid{said, *b})
	case *CurrentObserved:
		f.s.Currents = append(f.s.Currents, CurrentSaid{said, *b})
	case *WaterObserved:
		f.s.Waters = append(f.s.Waters, WaterSaid{said, *b})
	case *Buoy:
		f.s.Buoys = append(f.s.Buoys, BuoySaid{said, e.Kind == KindBuoySeen, *b})
	case *Call:
		f.s.Calls = append(f.s.Calls, CallSaid{said, e.Kind == KindCallAnswered, *b})
	case *Note:
		f.s.Notes = append(f.s.Notes, NoteSaid{said, b.Text})
	case *Joined, *Undone:
		// counted before the fold
	default:
		f.s.Unread++
	}
}

// finish puts together what needs the whole log.
func (f *folder) finish() State {
	f.s.Drill = f.drill && !f.real
	f.s.Test = !f.drill && !f.real
	for i := range f.s.Marks {
		f.s.Marks[i].Number = i + 1
	}
	f.finishPersons()
	f.finishStatus()
	for _, r := range f.roles {
		if r.Name != "" || r.Holder != "" {
			f.s.Roles = append(f.s.Roles, r)
		}
	}
	sort.Slice(f.s.Roles, func(i, j int) bool { return f.s.Roles[i].Role < f.s.Roles[j].Role })
	for id := range f.joined {
		f.s.Joined = append(f.s.Joined, id)
	}
	sort.Slice(f.s.Joined, func(i, j int) bool { return f.s.Joined[i] < f.s.Joined[j] })
	return f.s
}

// mayDecide reports whether a device may decide: it is in charge, or nobody is.
func (f *folder) mayDecide(d DeviceID) bool {
	c, ok := f.s.InCharge.Get()
	return !ok || c.Holder == d
}

func (f *folder) ask(e *entry, mark EventID, reason string) {
	f.s.Asked = append(f.s.Asked, Asked{Said: e.said(), Kind: e.Kind, Mark: mark, Reason: reason})
}

// granted drops the wishes that a decision settles.
func (f *folder) granted(match func(Asked) bool) {
	f.s.Asked = slices.DeleteFunc(f.s.Asked, match)
}

// inCharge: a higher term wins; of two claims of one term the first stays and
// the other is shown beside it.
func (f *folder) inCharge(e *entry, b *InCharge) {
	holder := b.Device
	if holder == "" {
		holder = e.Device
	}
	claim := Charge{Said: e.said(), Name: b.Name, Holder: holder, Term: b.Term}
	now, ok := f.s.InCharge.Get()
	switch {
	case !ok || b.Term > now.Term:
		f.s.InCharge, f.s.Rivals = nav.Some(claim), nil
	case b.Term == now.Term && holder != now.Holder:
		f.s.Rivals = append(f.s.Rivals, claim)
	}
}

// order: the authority's word. A suspension is not an end.
func (f *folder) order(e *entry, b *Order) {
	f.s.Orders = append(f.s.Orders, OrderSaid{e.said(), *b})
	if e.Kind == KindSuspended && f.s.Status == Open {
		f.setStatus(Suspended, e, b.Text)
		f.s.StatusBy = b.Station
	}
}

func (f *folder) setStatus(st Status, e *entry, reason string) {
	f.s.Status, f.s.StatusAt, f.s.StatusBy, f.s.StatusReason = st, e.At, e.By, reason
	f.decidedOn = e.Device
}

// stoodDown ends the incident, if the device may decide; reopened undoes that
// and every suspension.
func (f *folder) stoodDown(e *entry, b *StoodDown) {
	switch {
	case e.Kind == KindReopened:
		f.setStatus(Open, e, b.Reason)
	case f.mayDecide(e.Device):
		f.setStatus(StoodDownSt, e, b.Reason)
		f.granted(func(a Asked) bool { return a.Kind == KindStoodDown })
	default:
		f.ask(e, "", b.Reason)
	}
}

// sign is something that says a person may be in the water.
type sign struct {
	at     time.Time
	device DeviceID
	mark   EventID // "" for a sighting or a beacon
	// beacon is whose beacon spoke; 0 for no beacon. One that goes on sending
	// from a person who is aboard again says nothing.
	beacon PersonNo
}

// signGrace: a sighting on another device so shortly before a stand-down may
// not have been known to the one who stood down. Then the incident stays open;
// standing down again is cheap. Our choice.
const signGrace = 60 * time.Second

// finishStatus keeps or makes an incident open when a sign of a person came
// after it was stood down, or just before on another device.
func (f *folder) finishStatus() {
	if f.s.Status != StoodDownSt {
		f.allDismissed()
		return
	}
	down := f.s.StatusAt
	for _, sg := range f.signs {
		if sg.mark != "" {
			if m, ok := f.s.Mark(sg.mark); !ok || m.Dismissed.IsSet() {
				continue
			}
		}
		if p, ok := f.persons[sg.beacon]; ok && p.Status == IsAboard {
			continue
		}
		fresh := sg.at.After(down)
		unknown := sg.mark == "" && sg.device != f.decidedOn && !sg.at.Before(down.Add(-signGrace))
		if fresh || unknown {
			f.s.Status = Open
			f.s.StatusReason = "a sign of a person came in about the time of the stand-down"
			f.s.StatusAt = sg.at
			return
		}
	}
}

// allDismissed: an incident of which every mark was a mistake, and in which
// nobody is missing, is over.
func (f *folder) allDismissed() {
	if len(f.s.Marks) == 0 || len(f.s.Persons) > 0 || f.s.Status != Open {
		return
	}
	last := f.s.Marks[0]
	for _, m := range f.s.Marks {
		d, ok := m.Dismissed.Get()
		if !ok {
			return
		}
		if l, _ := last.Dismissed.Get(); d.At.After(l.At) {
			last = m
		}
	}
	d, _ := last.Dismissed.Get()
	f.s.Status, f.s.StatusAt, f.s.StatusBy, f.s.StatusReason = StoodDownSt, d.At, d.By, last.Reason
}
