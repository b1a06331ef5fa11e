package filter

import "fmt"

// maxEvents is how many openings and closings a report lists; later ones are only counted.
const maxEvents = 100

// breaker stops diverting: when more is held back than the budget allows, or when the inputs have just changed. In
// Observe mode nothing is held back, and only changes matter.
type breaker struct {
	mode   Mode
	budget *budget
	change change
	log    Breaker
}

func newBreaker(c Config, total int64) *breaker {
	return &breaker{mode: c.Mode, budget: newBudget(c.Budget, total),
		change: change{cooldown: c.Cooldown}, log: Breaker{Events: []BreakerEvent{}}}
}

// hold decides whether the record, with its verdict, is held back. class is its observed label, −1 when it has none,
// and names gives the classes' names. Every record passes here once, in input order.
func (b *breaker) hold(row int64, class int32, v Verdict, names []string) bool {
	if b.mode != Divert {
		return false
	}
	d := b.budget.decide(class, v == Quarantine)
	if d.all || d.class {
		b.budgetEvent(row, class, d, names)
	}
	if !d.hold || b.change.open {
		return false
	}
	b.budget.hold()
	return true
}

func (b *breaker) budgetEvent(row int64, class int32, d decision, names []string) {
	e := BreakerEvent{Row: row, Cause: "budget", Open: b.budget.all.open}
	what := "records"
	if d.class {
		e.Cause, e.Class, e.Open = "class-budget", names[class], b.budget.classes[class].open
		what = fmt.Sprintf("%q records", e.Class)
	}
	if e.Open {
		e.Why = fmt.Sprintf("the verdict is quarantine for %d of the last %d %s; %d may be held back", d.wanted, d.out, what, d.limit)
	} else {
		e.Why = fmt.Sprintf("the verdict is quarantine for only %d of the last %d %s; %d may be held back", d.wanted, d.out, what, d.limit)
	}
	b.note(e)
}

// changed notes that the alarm for changed inputs was raised at the row.
func (b *breaker) changed(row int64) {
	c := &b.change
	b.note(BreakerEvent{Row: row, Open: true, Cause: "change", Why: fmt.Sprintf(
		"from row %d on the labels disagree with the model far more often than in the window, where up to %.1f %% is normal",
		c.onset, 100*c.normal)})
}

// settled notes that the readings are back to normal.
func (b *breaker) settled(row int64) {
	c := &b.change
	b.note(BreakerEvent{Row: row, Cause: "change", Why: fmt.Sprintf(
		"%d retrains in a row found disagreement back to normal, the last %.1f %%", c.calm, 100*c.share())})
}

func (b *breaker) note(e BreakerEvent) {
	if e.Open {
		b.log.Opened++
	}
	if len(b.log.Events) < maxEvents {
		b.log.Events = append(b.log.Events, e)
	}
}

// report gives what happened.
func (b *breaker) report() Breaker {
	b.log.Open = b.change.open || b.budget.all.open
	for i := range b.budget.classes {
		b.log.Open = b.log.Open || b.budget.classes[i].open
	}
	return b.log
}
