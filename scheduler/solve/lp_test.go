package solve

import (
	"bufio"
	"bytes"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/testdata"
)

// The least bound(p) over all prices is the optimum of a linear programme: take
// fractions of candidate scans, at each step of a block no more than one in
// all, and of each unit no more than its cap. (The per-block programme is an
// interval scheduling problem, whose polytope has integer corners, so that
// Lagrangian and linear relaxation agree.) Here an outside solver, CBC, solves
// it from the text of the programme.
func TestBoundAgainstLinearProgramme(t *testing.T) {
	if _, err := exec.LookPath("cbc"); err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal("no cbc: apt-get install coinor-cbc")
		}
		t.Skip("no cbc: apt-get install coinor-cbc")
	}
	for _, name := range []string{"small-1", "small-2", "medium-2"} {
		t.Run(name, func(t *testing.T) {
			tb := newTable(weekOf(t, name))
			p := newPricing(newDual(tb, 1))
			for !p.done() {
				p.step()
			}
			want := cbc(t, linear(tb))
			t.Logf("bound %.4f, linear programme %.4f", p.bound, want)
			if p.bound < want*(1-1e-7) || p.bound > want*1.0005 {
				t.Errorf("bound %.6f, the linear programme says %.6f", p.bound, want)
			}
		})
	}
}

func weekOf(t testing.TB, name string) *feasible.Problem {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// linear writes the programme in CPLEX's LP format. x is a candidate scan, e
// one option of a goal for it.
func linear(t *table) []byte {
	var goal, rows bytes.Buffer
	units := make([]strings.Builder, len(t.p.Units.Units))
	n, r := 0, 0
	for bi := range t.cells {
		b := &t.p.Blocks[bi]
		busy := make([]strings.Builder, b.Steps+b.MinGap+1)
		for ci := range t.cells[bi] {
			c := &t.cells[bi][ci]
			for _, run := range c.runs {
				for k := run.From; k < run.To; k++ {
					if !options(c, k, &n, &goal, &rows, units, &r) {
						continue
					}
					for at := k; at < k+c.steps+b.MinGap && at < len(busy); at++ {
						fmt.Fprintf(&busy[at], " + x%d", n)
					}
				}
			}
		}
		for at := range busy {
			if busy[at].Len() > 0 {
				r++
				fmt.Fprintf(&rows, " r%d:%s <= 1\n", r, busy[at].String())
			}
		}
	}
	for ui := range units {
		if units[ui].Len() > 0 {
			r++
			fmt.Fprintf(&rows, " r%d:%s <= %d\n", r, units[ui].String(), t.p.Units.Units[ui].Cap)
		}
	}
	return fmt.Appendf(nil, "Maximize\n obj:%s\nSubject To\n%sEnd\n", goal.String(), rows.String())
}

// options writes what one candidate can earn: of each goal one option at most.
func options(c *cell, k int, n *int, goal, rows *bytes.Buffer, units []strings.Builder, r *int) bool {
	type option struct {
		row   *row
		value float64
	}
	groups := map[int][]option{}
	var order []int
	for i := range c.rows {
		if v := c.rows[i].at(k); v > 0 {
			g := c.rows[i].group
			if groups[g] == nil {
				order = append(order, g)
			}
			groups[g] = append(groups[g], option{&c.rows[i], v})
		}
	}
	if len(order) == 0 {
		return false
	}
	*n++
	for _, g := range order {
		var all strings.Builder
		for i, o := range groups[g] {
			e := fmt.Sprintf("e%d_%d_%d", *n, g, i)
			fmt.Fprintf(goal, " + %.12g %s\n", o.value, e)
			fmt.Fprintf(&all, " + %s", e)
			fmt.Fprintf(&units[o.row.unit], " + %d %s\n", o.row.load, e)
		}
		*r++
		fmt.Fprintf(rows, " r%d:%s - x%d <= 0\n", *r, all.String(), *n)
	}
	return true
}

// cbc is the optimum of a programme.
func cbc(t *testing.T, programme []byte) float64 {
	t.Helper()
	dir := t.TempDir()
	in, out := filepath.Join(dir, "in.lp"), filepath.Join(dir, "out.txt")
	if err := os.WriteFile(in, programme, 0o600); err != nil {
		t.Fatal(err)
	}
	cmd := exec.CommandContext(t.Context(), "cbc", in, "solve", "solution", out)
	cmd.WaitDelay = time.Second
	if log, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("cbc: %v\n%s", err, log)
	}
	f, err := os.Open(out)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	line, err := bufio.NewReader(f).ReadString('\n')
	if err != nil {
		t.Fatal(err)
	}
	_, value, ok := strings.Cut(line, "Optimal - objective value")
	v := math.NaN()
	if _, err := fmt.Sscan(value, &v); !ok || err != nil {
		t.Fatalf("cbc says %q", line)
	}
	return math.Abs(v)
}
