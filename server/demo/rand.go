package demo

import "math"

// random is a stream of random numbers that will be the same with every
// version of Go: splitmix64 (Steele, Lea & Flood 2014, OOPSLA, "Fast splittable
// pseudorandom number generators").
type random struct{ state uint64 }

// stream is a stream of its own for each seed and purpose, so that a change in
// what one part draws leaves the others alone.
func stream(seed uint64, purpose string) *random {
	r := &random{seed}
	for _, b := range []byte(purpose) {
		r.state ^= uint64(b)
		r.state = r.next()
	}
	return r
}

// next is the next 64 random bits.
func (r *random) next() uint64 {
	r.state += 0x9e3779b97f4a7c15
	z := r.state
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// float is uniform in [0, 1).
func (r *random) float() float64 { return float64(r.next()>>11) / (1 << 53) }

// between is uniform in [lo, hi).
func (r *random) between(lo, hi float64) float64 { return lo + (hi-lo)*r.float() }

// below is a whole number in [0, n). The bias of the remainder is far below
// what can be seen.
func (r *random) below(n int) int { return int(r.next() % uint64(n)) }

// chance is true with probability p.
func (r *random) chance(p float64) bool { return r.float() < p }

// normal has mean 0 and standard deviation 1 (Box & Muller 1958).
func (r *random) normal() float64 {
	return math.Sqrt(-2*math.Log(1-r.float())) * math.Cos(2*math.Pi*r.float())
}

// logNormal has the given median, and so many factors of e as its standard
// deviation.
func (r *random) logNormal(median, sigma float64) float64 {
	return median * math.Exp(sigma*r.normal())
}

// pick is one of the items.
func pick[T any](r *random, items ...T) T { return items[r.below(len(items))] }

// shuffled is the numbers 0 to n-1 in random order.
func (r *random) shuffled(n int) []int {
	order := make([]int, n)
	for i := range order {
		j := r.below(i + 1)
		order[i] = order[j]
		order[j] = i
	}
	return order
}
