package drive

import (
	"math"
	"time"
)

// A histogram counts times in buckets that are 2 % wide, from a microsecond to more than a quarter of an hour. Its quantiles are upper bounds of buckets.
type histogram struct {
	counts [1100]int64
	total  int64
	most   time.Duration
}

const bucketWidth = 1.02

func bucketOf(d time.Duration) int {
	if d <= time.Microsecond {
		return 0
	}
	return min(int(math.Log(float64(d)/float64(time.Microsecond))/math.Log(bucketWidth))+1, len(histogram{}.counts)-1)
}

func (h *histogram) add(d time.Duration) {
	h.counts[bucketOf(d)]++
	h.total++
	h.most = max(h.most, d)
}

// quantile returns the time that a share of all are within; 0 of none.
func (h *histogram) quantile(share float64) time.Duration {
	rank := int64(math.Ceil(share * float64(h.total)))
	for i, n := range h.counts {
		if rank -= n; rank <= 0 && h.total > 0 {
			return min(h.most, time.Duration(math.Pow(bucketWidth, float64(i))*float64(time.Microsecond)))
		}
	}
	return 0
}
