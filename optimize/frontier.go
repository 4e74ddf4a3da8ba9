package optimize

import (
	"cmp"
	"slices"
	"sync"

	"cedewright/portfolio/treaty"
)

// nonDominated gives the feasible records that no other one beats: none has as much relief for less margin, or more relief for as much
// margin. They come by rising relief; of equal pairs the first stands.
func nonDominated(records []record) []record {
	var list []record
	for _, r := range records {
		if r.violation == 0 {
			list = append(list, r)
		}
	}
	slices.SortStableFunc(list, func(a, b record) int {
		return cmp.Or(cmp.Compare(b.relief, a.relief), cmp.Compare(a.margin, b.margin))
	})
	var front []record
	for _, r := range list {
		if len(front) == 0 || r.margin < front[len(front)-1].margin {
			front = append(front, r)
		}
	}
	slices.Reverse(front)
	return front
}

// thin keeps at most count records of a front, ends and the plan with the given key included: again and again the inner one is dropped
// whose neighbours are nearest, measured along both axes in units of the front's width.
func thin(front []record, count int, keep string) []record {
	front = slices.Clone(front)
	if len(front) < 3 {
		return front
	}
	width := front[len(front)-1].relief - front[0].relief
	height := front[len(front)-1].margin - front[0].margin
	for len(front) > count {
		drop, nearest := -1, 0.0
		for i := 1; i < len(front)-1; i++ {
			if front[i].plan.key() == keep {
				continue
			}
			room := (front[i+1].relief-front[i-1].relief)/width + (front[i+1].margin-front[i-1].margin)/height
			if drop < 0 || room < nearest {
				drop, nearest = i, room
			}
		}
		if drop < 0 {
			break
		}
		front = slices.Delete(front, drop, drop+1)
	}
	return front
}

// AppraiseAll appraises programmes with detail on several workers, in their order; done is told how many are ready, and may be nil.
func AppraiseAll(e Evaluator, programmes []treaty.Programme, workers int, done func(int)) ([]Appraisal, error) {
	results := make([]Appraisal, len(programmes))
	errs := make([]error, len(programmes))
	next := make(chan int)
	finished := make(chan struct{})
	var group sync.WaitGroup
	for range max(workers, 1) {
		group.Go(func() {
			for i := range next {
				results[i], errs[i] = e.Appraise(programmes[i], true)
				finished <- struct{}{}
			}
		})
	}
	go func() {
		for i := range programmes {
			next <- i
		}
		close(next)
	}()
	for i := range programmes {
		<-finished
		if done != nil {
			done(i + 1)
		}
	}
	group.Wait()
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	return results, nil
}
