package transform

import "sync"

// recentLimit is how many plans are kept. A recording needs three or four lengths;
// a folder of equal recordings needs no more.
const recentLimit = 16

// planCache keeps the plans that were used last.
type planCache struct {
	mu    sync.Mutex
	plans []*Plan // most recent first
}

var recentPlans planCache

// get returns the plan for length n, which must be a good one.
func (c *planCache) get(n int) *Plan {
	c.mu.Lock()
	defer c.mu.Unlock()
	for i, p := range c.plans {
		if p.n == n {
			copy(c.plans[1:i+1], c.plans[:i])
			c.plans[0] = p
			return p
		}
	}
	p := makePlan(n)
	if len(c.plans) < recentLimit {
		c.plans = append(c.plans, nil)
	}
	copy(c.plans[1:], c.plans)
	c.plans[0] = p
	return p
}
