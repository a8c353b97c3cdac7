package psd

import (
	"slices"
	"sync"

	"beadwell/calib/relaxation"
)

// latticesKept is the number of lattices that are remembered: those of the fits and of the bias for both kinds of axes, and some
// for other recordings that are analysed at the same time.
const latticesKept = 16

// recentLattices remembers the lattices that were used last. Axes of a recording, and recordings of a folder, have the
// same drag and frequencies again and again, and a lattice takes longer than a fit on it.
var recentLattices latticeCache

type latticeCache struct {
	lock  sync.Mutex
	items []latticeItem // the one used last at the end
}

type latticeItem struct {
	of      latticeKey
	sigma   []float64
	lattice *lattice
}

// latticeKey is what a lattice is made of, but for the frequencies.
type latticeKey struct {
	drag                 any
	constant             bool
	mass, rate, exposure float64
}

// lattice returns the lattice of the blocks, which is not to be changed. The rate is in Hz, the exposure in s.
func (h Hydrodynamic) lattice(b relaxation.Blocks, rate, exposure float64) *lattice {
	if h.Drag != nil && h.DragKey == nil {
		return h.newLattice(b, rate, exposure)
	}
	of := latticeKey{drag: h.DragKey, constant: h.Drag == nil, mass: h.MassCorner, rate: rate, exposure: exposure}
	if l := recentLattices.get(of, b.Sigma); l != nil {
		return l
	}
	l := h.newLattice(b, rate, exposure)
	recentLattices.put(latticeItem{of, b.Sigma, l})
	return l
}

func (c *latticeCache) get(of latticeKey, sigma []float64) *lattice {
	c.lock.Lock()
	defer c.lock.Unlock()
	for i := len(c.items) - 1; i >= 0; i-- {
		if item := c.items[i]; item.of == of && slices.Equal(item.sigma, sigma) {
			c.items = append(slices.Delete(c.items, i, i+1), item)
			return item.lattice
		}
	}
	return nil
}

func (c *latticeCache) put(item latticeItem) {
	c.lock.Lock()
	defer c.lock.Unlock()
	if len(c.items) == latticesKept {
		c.items = slices.Delete(c.items, 0, 1)
	}
	c.items = append(c.items, item)
}
