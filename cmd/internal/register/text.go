package register

import (
	"cmp"
	"fmt"
	"io"
	"maps"
	"os"
	"slices"
	"strings"
	"time"

	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/run"
	"leat/cmd/internal/register/store"
)

// A progress writes the line of progress: over itself on a terminal, else a new one now and then.
type progress struct {
	out      io.Writer
	terminal bool
	began    time.Time
	last     time.Time
}

const (
	onTerminal = 500 * time.Millisecond // between two lines of progress
	inLog      = 10 * time.Second
)

func newProgress(out io.Writer) *progress {
	p := &progress{out: out, began: time.Now()}
	if file, ok := out.(*os.File); ok {
		if info, err := file.Stat(); err == nil {
			p.terminal = info.Mode()&os.ModeCharDevice != 0
		}
	}
	p.last = p.began
	return p
}

func (p *progress) told(now *run.Progress) {
	interval := inLog
	if p.terminal {
		interval = onTerminal
	}
	ended := now.Counts.Read == now.Total
	if time.Since(p.last) < interval && !(ended && p.terminal) {
		return
	}
	p.last = time.Now()
	line := progressLine(now, p.last.Sub(p.began))
	switch {
	case !p.terminal:
		fmt.Fprintln(p.out, line)
	case ended:
		fmt.Fprintf(p.out, "\r\x1b[K%s\n", line)
	default:
		fmt.Fprintf(p.out, "\r\x1b[K%s", line)
	}
}

// progressLine tells rows, rate, time left and problems by kind.
func progressLine(p *run.Progress, took time.Duration) string {
	var b strings.Builder
	rate := float64(p.Counts.Read) / took.Seconds()
	if p.Total >= 0 {
		fmt.Fprintf(&b, "%d of %d rows", p.Counts.Read, max(p.Total, p.Counts.Read))
	} else {
		fmt.Fprintf(&b, "%d rows", p.Counts.Read)
	}
	fmt.Fprintf(&b, ", %.0f rows/s", rate)
	if left := p.Total - p.Counts.Read; p.Total >= 0 && left > 0 && rate > 0 {
		fmt.Fprintf(&b, ", %v left", time.Duration(float64(left)/rate*float64(time.Second)).Round(time.Second))
	}
	fmt.Fprintf(&b, ", %d unchanged, %d bad", p.Counts.Unchanged, p.Counts.Bad)
	codes := p.Kinds.Codes()
	if most := codes.Most(); len(most) > 0 {
		b.WriteString(" (")
		for i, kind := range most[:min(len(most), 3)] {
			if i > 0 {
				b.WriteString(", ")
			}
			fmt.Fprintf(&b, "%s %d", kind.Code, codes[kind])
		}
		b.WriteByte(')')
	}
	return b.String()
}

// A listing prints problems one by one, up to a number.
type listing struct {
	out           io.Writer
	most          int // 0 for all
	printed, more int64
}

func (l *listing) add(problems []store.Problem) {
	for i := range problems {
		if l.most > 0 && l.printed == int64(l.most) {
			l.more += int64(len(problems) - i)
			return
		}
		l.printed++
		fmt.Fprintln(l.out, problemLine(&problems[i]))
	}
}

func problemLine(p *store.Problem) string {
	var b strings.Builder
	fmt.Fprintf(&b, "asset %s", p.Asset)
	if p.Line > 0 {
		fmt.Fprintf(&b, ", line %d", p.Line)
	}
	if p.Column != "" {
		fmt.Fprintf(&b, ", column %s", p.Column)
	}
	if p.Pointer != "" {
		fmt.Fprintf(&b, ", %s", p.Pointer)
	}
	fmt.Fprintf(&b, ": %s: %s", p.Code, p.Text)
	return b.String()
}

func (l *listing) end() {
	if l.more > 0 {
		fmt.Fprintf(l.out, "and %d more problems; --problems 0 prints all\n", l.more)
	}
}

// summarize prints the account of a run or a check.
func (c *command) summarize(file *mapping.File, r *run.Report) {
	n := r.Counts
	rate := float64(n.Read) / r.Took.Seconds()
	took := r.Took.Round(10 * time.Millisecond)
	switch {
	case c.name == "check":
		fmt.Fprintf(c.stdout, "checked %d rows in %v (%.0f rows/s): %d bad, %d problems\n", n.Read, took, rate, n.Bad, n.Problems)
	case c.options.DryRun:
		fmt.Fprintf(c.stdout, "dry run: %d rows in %v (%.0f rows/s): %d computed, %d bad, %d problems; nothing is written\n", n.Read, took, rate, n.Computed, n.Bad, n.Problems)
	default:
		fmt.Fprintf(c.stdout, "run %s: %d rows in %v (%.0f rows/s): %d computed, %d unchanged, %d bad, %d results removed\n", r.Run, n.Read, took, rate, n.Computed, n.Unchanged, n.Bad, n.Removed)
		if n.Problems > 0 {
			fmt.Fprintf(c.stdout, "%d problems in %s\n", n.Problems, problemsName(file))
		}
	}
	for _, kind := range r.Kinds.Most() {
		fmt.Fprintf(c.stdout, "  %8d  %-20s %s\n", r.Kinds[kind], kind.Code, kind.Columns)
	}
	if len(r.Verdicts) > 0 {
		fmt.Fprintf(c.stdout, "verdicts of the assets computed: %s\n", most(r.Verdicts))
	}
	if len(r.Warned) > 0 {
		fmt.Fprintf(c.stdout, "assets computed with warnings: %s\n", most(r.Warned))
	}
	if len(r.Worst) > 0 {
		fmt.Fprintln(c.stdout, "worst of the assets computed:")
		for _, w := range r.Worst {
			fmt.Fprintf(c.stdout, "  %-24s %s\n", w.Asset, w.Text)
		}
	}
}

// most tells counts, the greatest first.
func most(counts map[string]int64) string {
	var parts []string
	for _, name := range slices.SortedFunc(maps.Keys(counts), func(a, b string) int {
		return cmp.Or(cmp.Compare(counts[b], counts[a]), cmp.Compare(a, b))
	}) {
		parts = append(parts, fmt.Sprintf("%d %s", counts[name], name))
	}
	return strings.Join(parts, ", ")
}

// problemsName is where the problems are.
func problemsName(file *mapping.File) string {
	if file.Target.Problems != "" {
		return file.Target.Problems
	}
	return file.Target.Table + "_problems"
}
