package noise

import "sync"

// job is a model to be fitted from p, which is changed.
type job struct {
	p     *Params
	name  string
	shape shape
	steps int
}

// runAll fits models that do not depend on each other, on at most d.Workers goroutines, and returns them in order.
func runAll(d *Data, jobs []job) []*candidate {
	out := make([]*candidate, len(jobs))
	next := make(chan int) // unbuffered: a worker takes what it can do now
	var wg sync.WaitGroup
	for range max(1, min(d.Workers, len(jobs))) {
		wg.Go(func() {
			for i := range next {
				j := jobs[i]
				out[i] = run(d, j.p, j.name, j.shape, j.steps)
			}
		})
	}
	for i := range jobs {
		next <- i
	}
	close(next)
	wg.Wait()
	return out
}
