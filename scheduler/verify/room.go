package verify

import (
	"math"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// checkBlocks checks the scans of every block, in time order: each by itself
// on the sky, and the room between neighbours.
func (k *checker) checkBlocks() error {
	byBlock := map[*block][]*scan{}
	for _, s := range k.scans {
		byBlock[s.block] = append(byBlock[s.block], s)
	}
	for _, b := range k.blocks {
		// A plan's list may be in any order; time decides who are neighbours.
		mine := byBlock[b]
		sortByStart(mine, func(s *scan) msec { return s.start })
		for i, s := range mine {
			if err := k.options.stopped(); err != nil {
				return err
			}
			k.checkInBlock(s)
			places, err := k.observe(s)
			if err != nil {
				return scheduler.Errorf(scheduler.ErrInvalid, "scan %d, %s: %w", s.index, s.name(), err)
			}
			k.checkUp(s, places)
			if b.telescope.Mount == scheduler.MountAltAz {
				k.checkMotor(s, places)
			}
			k.checkTOA(s)
			if i > 0 {
				k.checkRoom(mine[i-1], s)
			}
		}
	}
	return nil
}

// checkInBlock checks a scan against its block's ends and lost parts.
func (k *checker) checkInBlock(s *scan) {
	ready, slack := s.block.telescope.ready(), lengthOf(k.options.TimeS, second)
	if have := s.start - s.block.start; have+slack < ready {
		k.badScan(s, KindSetup, figures{have.seconds(), ready.seconds(), "s"},
			"begins %.0f s after its block, which needs %.0f s of setup and calibration", have.seconds(), ready.seconds())
	}
	if s.end > s.block.end {
		k.badScan(s, KindBlockEnd, figures{(s.end - s.block.end).seconds(), 0, "s"}, "ends %.0f s after its block", (s.end - s.block.end).seconds())
	}
	for _, l := range s.block.lost {
		if s.start < l[1] && s.end > l[0] {
			k.badScan(s, KindLost, none, "uses the lost part from %s to %s", at(l[0]), at(l[1]))
		}
		if have := s.start - l[1]; have >= 0 && have+slack < ready {
			k.badScan(s, KindSetup, figures{have.seconds(), ready.seconds(), "s"},
				"begins %.0f s after the lost part that ends at %s; %.0f s of setup and calibration are needed", have.seconds(), at(l[1]), ready.seconds())
		}
	}
}

// checkRoom checks that the telescope can get from one scan to the next.
func (k *checker) checkRoom(before, s *scan) {
	t := s.block.telescope
	slew := t.slewS(before.last, s.first)
	need := slew + t.CalS
	if before.receiver != s.receiver {
		need += t.SwitchS
	}
	have := (s.start - before.end).seconds()
	if !(have >= need-k.options.TimeS) {
		k.badScan(s, KindRoom, figures{have, need, "s"},
			"begins %.0f s after the end of scan %d (%s), and %.1f s are needed, of which %.1f s to slew and settle",
			have, before.index, before.source.Name, need, slew)
	}
}

// slewS is the time in seconds to move from one pose to another and settle.
func (t *telescope) slewS(from, to pose) float64 {
	var first, second sky.Axis
	switch t.Mount {
	case scheduler.MountAltAz:
		first = sky.Axis{RateDegS: t.RateAzDegS, AccelDegS2: t.AccelAzDegS2}
		second = sky.Axis{RateDegS: t.RateElDegS, AccelDegS2: t.AccelElDegS2}
	case scheduler.MountEquatorial:
		// In hour angle the sky stands still, so travel is what the axis turns.
		first = sky.Axis{RateDegS: t.RateHADegS, AccelDegS2: t.AccelHADegS2}
		second = sky.Axis{RateDegS: t.RateDecDegS, AccelDegS2: t.AccelDecDegS2}
	default: // a transit mount waits for the sky to turn
		return t.SettleS + sky.Axis{RateDegS: t.RateElDegS, AccelDegS2: t.AccelElDegS2}.Seconds(to.second-from.second)
	}
	return t.SettleS + max(first.Seconds(to.first-from.first), second.Seconds(to.second-from.second))
}

// checkTOA checks the predicted uncertainty of a scan.
func (k *checker) checkTOA(s *scan) {
	own := 0.0
	if s.info > 0 {
		own = 1e6 / math.Sqrt(s.info)
	}
	if listed := s.listed.TOAUs; (own == 0) != (listed == 0) || !k.same(listed, own) {
		k.badScan(s, KindTOA, figures{listed, own, "us"}, "predicted uncertainty %.6g us, worked out again %.6g us", listed, own)
	}
}
