package programme

import "math"

// master is the linear problem of Dantzig and Wolfe, Operations Research 8 (1960)
// 101-111: the best mix of whole plans found so far that holds the limits on
// average, max sum(w value) with sum(w use) <= limit, sum(w) = 1, w >= 0. Its dual
// gives the prices to look for the next plan at. A limit may be exceeded at a
// price no plan is worth, so that there always is a solution; that keeps prices
// from growing without end.
//
// It is solved by the revised simplex method with the inverse of the basis kept
// (G. Dantzig, Linear Programming and Extensions, 1963, chapter 9).
type master struct {
	rows    int // limits; one more row is sum(w) = 1
	limit   []float64
	penalty []float64
	value   []float64
	use     [][]float64

	basis []int       // column in each row: plans from 0, then -1-r slack, -1-rows-r excess
	inv   [][]float64 // of the basis
	x     []float64   // of the basic columns
}

// newMaster begins with one plan.
func newMaster(limit, penalty []float64, value float64, use []float64) *master {
	n := len(limit)
	m := &master{rows: n, limit: limit, penalty: penalty, value: []float64{value}, use: [][]float64{use}}
	m.basis, m.x = make([]int, n+1), make([]float64, n+1)
	m.inv = make([][]float64, n+1)
	for r := range m.inv {
		m.inv[r] = make([]float64, n+1)
		m.inv[r][r] = 1
	}
	m.x[n] = 1
	for r := range n {
		m.basis[r] = -1 - r
		m.x[r] = limit[r] - use[r]
		m.inv[r][n] = -use[r]
		if m.x[r] < 0 { // in excess
			m.basis[r] = -1 - n - r
			m.x[r] = -m.x[r]
			m.inv[r][r], m.inv[r][n] = -1, use[r]
		}
	}
	return m
}

func (m *master) add(value float64, use []float64) {
	m.value = append(m.value, value)
	m.use = append(m.use, use)
}

func (m *master) worth(column int) float64 {
	switch {
	case column >= 0:
		return m.value[column]
	case column >= -m.rows:
		return 0
	}
	return -m.penalty[-1-m.rows-column]
}

// entering writes the inverse of the basis times a column.
func (m *master) entering(column int, out []float64) {
	for r, row := range m.inv {
		switch {
		case column >= 0:
			sum := row[m.rows]
			for k, u := range m.use[column] {
				sum += float64(row[k] * u)
			}
			out[r] = sum
		case column >= -m.rows:
			out[r] = row[-1-column]
		default:
			out[r] = -row[-1-m.rows-column]
		}
	}
}

// solve returns the value, the prices of the limits and whether the simplex method
// came to its end.
func (m *master) solve() (value float64, price []float64, ok bool) {
	const tolerance = 1e-11
	n := m.rows
	dual := make([]float64, n+1)
	d := make([]float64, n+1)
	scale := 1.0
	for _, v := range m.value {
		scale = max(scale, abs(v))
	}
	for pivots := range 20 * (n + len(m.value) + 10) {
		for k := range dual {
			dual[k] = 0
		}
		for r, row := range m.inv {
			if c := m.worth(m.basis[r]); c != 0 {
				for k, v := range row {
					dual[k] += float64(c * v)
				}
			}
		}
		// The most promising column; after many pivots the first, so that it ends
		// (R. Bland, Mathematics of Operations Research 2 (1977) 103-107).
		first := pivots > 10*(n+len(m.value))
		const none = math.MinInt
		enter, best := none, tolerance*scale
		try := func(column int, gain float64) {
			if gain > best && (enter == none || !first) {
				enter = column
				if !first {
					best = gain
				}
			}
		}
		for t, u := range m.use {
			gain := m.value[t] - dual[n]
			for k, x := range u {
				gain -= float64(dual[k] * x)
			}
			try(t, gain)
		}
		for r := range n {
			try(-1-r, -dual[r])
			try(-1-n-r, dual[r]-m.penalty[r])
		}
		if enter == none {
			for r := range m.x {
				value += float64(m.worth(m.basis[r]) * m.x[r])
			}
			price = dual[:n]
			for k := range price {
				price[k] = max(0, price[k])
			}
			return value, price, true
		}
		m.entering(enter, d)
		leave, least := -1, math.Inf(1)
		for r := range d {
			if d[r] > 1e-9 {
				if t := m.x[r] / d[r]; t < least || t == least && m.basis[r] > m.basis[leave] {
					leave, least = r, t
				}
			}
		}
		if leave < 0 {
			return 0, nil, false
		}
		m.pivot(leave, enter, d)
	}
	return 0, nil, false
}

func (m *master) pivot(leave, enter int, d []float64) {
	pr := m.inv[leave]
	for k := range pr {
		pr[k] /= d[leave]
	}
	m.x[leave] = max(0, m.x[leave]/d[leave])
	for r, row := range m.inv {
		if r == leave || d[r] == 0 {
			continue
		}
		for k := range row {
			row[k] -= float64(d[r] * pr[k])
		}
		m.x[r] = max(0, m.x[r]-float64(d[r]*m.x[leave]))
	}
	m.basis[leave] = enter
}
