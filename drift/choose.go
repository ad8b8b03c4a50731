package drift

// Wearing answers "what are they wearing?".
type Wearing string

// Moving answers "are they moving?".
type Moving string

// The answers. Not known is an answer, and the first one.
const (
	WearingUnknown  Wearing = "unknown"
	Clothes         Wearing = "clothes"       // ordinary clothes, nothing that floats
	BuoyancyVest    Wearing = "buoyancy_vest" // work vest or buoyancy aid: holds up, does not turn
	LifeJacket      Wearing = "lifejacket"    // turns face up
	SurvivalSuit    Wearing = "survival_suit"
	DivingSuit      Wearing = "diving_suit"
	MovingUnknown   Moving  = "unknown"
	IsMoving        Moving  = "yes"
	IsNotMoving     Moving  = "no"
	unknownPosition         = "Nothing certain: the class that stands for all, with the widest fan."
)

// Choice is a class chosen by the two questions, and why.
type Choice struct {
	ClassID string
	Why     string
}

// Choose finds the class from the two answers; any answer it does not know
// counts as not known, and gives [DefaultClass]. It is a choice of how someone
// floats, and says nothing about their state.
func Choose(wearing Wearing, moving Moving) Choice {
	switch wearing {
	case SurvivalSuit:
		return Choice{"person-survival-suit", "A survival suit floats people on their back."}
	case DivingSuit:
		return Choice{"person-diving-suit", "A diving suit floats people on their back."}
	case LifeJacket:
		return Choice{"person-sitting", "A lifejacket turns people face up, leaning back."}
	case BuoyancyVest:
		if moving == IsMoving {
			return Choice{"person-upright", "People who move in a buoyancy vest float upright."}
		}
	case Clothes:
		if moving == IsNotMoving {
			return Choice{"person-face-down", "Without anything that floats them, people who do not move lie flat."}
		}
	}
	return Choice{DefaultClass, unknownPosition}
}
