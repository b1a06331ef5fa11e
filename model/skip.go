package model

// Skip has the trainer stand as one does after n fits that gave a snapshot, except that it knows nothing of them: the
// next fit is cold, and gives what a cold fit with the same rows would have given that other trainer; so do the warm
// ones after it.
func (tr *Trainer) Skip(n uint64) {
	tr.last, tr.layer = nil, nil
	tr.stage = n
}
