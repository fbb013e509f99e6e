package runsheet

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/orbit"
	"cadencewright/astro/sensitivity"
	"cadencewright/astro/sky"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
)

// placed is where the drives stand at the two ends of a scan.
type placed struct{ first, last drives }

// drives are the positions that slews are counted between, as the planning
// model has them: motor azimuth and elevation, hour angle and declination, or
// 0 and declination, in degrees.
type drives struct{ axis1, axis2 float64 }

// buildScan works out one line of the sheet.
func buildScan(c *scheduler.Campaign, tel *scheduler.Telescope, x PlannedScan) (Scan, placed, error) {
	src := c.SourceByName(x.Source)
	rx := tel.ReceiverByCode(x.Receiver)
	if src == nil || rx == nil {
		return Scan{}, placed{}, fmt.Errorf("scan %s: source %q or receiver %q of telescope %s is not in the campaign any more", x.ID, x.Source, x.Receiver, tel.Code)
	}
	lst, err := timescale.LST(x.Start, c.DUT1S, tel.Site().Lon)
	if err != nil {
		return Scan{}, placed{}, err
	}
	out := Scan{ID: x.ID, State: x.State, Start: x.Start, End: x.End(), Minutes: x.Minutes, LSTStartH: lst.Hours(), Source: x.Source,
		Receiver: x.Receiver, FreqMHz: rx.FreqMHz, BandwidthMHz: rx.BandwidthMHz, CalS: tel.CalS, TOAUs: x.TOAUs, Pinned: x.Pinned, Notes: x.Notes, For: []string{}}
	for _, e := range x.Earns {
		out.For = append(out.For, e.Unit)
	}
	ra, dec := src.Star().At(timescale.UTC(x.Start).Float())
	out.RAJ2000, out.DecJ2000 = FormatRA(ra), FormatDec(dec)
	here, err := track(c, tel, src, rx, x, &out)
	if err != nil {
		return Scan{}, placed{}, err
	}
	if src.Binary != nil {
		if out.Phase, err = phases(src, x); err != nil {
			return Scan{}, placed{}, err
		}
	}
	return out, here, nil
}

// samples is how many steps a scan's track is looked at in.
const samples = 60

// track follows the source through the scan.
func track(c *scheduler.Campaign, tel *scheduler.Telescope, src *scheduler.Source, rx *scheduler.Receiver, x PlannedScan, out *Scan) (placed, error) {
	step := time.Duration(x.Minutes) * time.Minute / samples
	w, err := sky.NewWindow(tel.Site(), x.Start, step, samples+1, c.DUT1S)
	if err != nil {
		return placed{}, err
	}
	zone, err := tel.Location()
	if err != nil {
		return placed{}, err
	}
	var t sky.Track
	w.Track(src.Star(), &t)
	out.LowestElDeg, out.LeastSunDeg = 90, 180
	meter := sensitivity.NewRadiometer(src.Pulsar(), rx.FrontEnd())
	snr2 := 0.0
	for i := range t.ElDeg {
		out.LowestElDeg = math.Min(out.LowestElDeg, t.ElDeg[i])
		out.LeastSunDeg = math.Min(out.LeastSunDeg, t.SunDeg[i])
		band := 1.0
		if len(rx.RFILoss) == 24 {
			band = 1 - rx.RFILoss[x.Start.Add(time.Duration(i)*step).In(zone).Hour()]
		}
		s := meter.SNRRate(math.Sin(t.ElDeg[i]*math.Pi/180), band)
		weight := step.Seconds()
		if i == 0 || i == samples {
			weight /= 2 // the trapezoidal rule
		}
		snr2 += s * s * weight
	}
	out.SNR = math.Sqrt(snr2)
	path := sky.UnwrapDeg(t.AzDeg, nil)
	turn := 0
	if x.MotorAzDeg != nil {
		turn = int(math.Round((*x.MotorAzDeg - path[0]) / 360))
	}
	out.First, out.Last = pointing(tel, &t, path, 0, turn), pointing(tel, &t, path, samples, turn)
	return placed{drivesAt(tel, &t, path, 0, turn), drivesAt(tel, &t, path, samples, turn)}, nil
}

func pointing(tel *scheduler.Telescope, t *sky.Track, path []float64, i, turn int) Pointing {
	p := Pointing{AzDeg: t.AzDeg[i], ElDeg: t.ElDeg[i], HAH: t.HADeg[i] / 15}
	if tel.Mount == scheduler.MountAltAz {
		m := path[i] + 360*float64(turn)
		p.MotorAzDeg, p.Turn = &m, int(math.Floor(m/360))
	}
	return p
}

func drivesAt(tel *scheduler.Telescope, t *sky.Track, path []float64, i, turn int) drives {
	switch tel.Mount {
	case scheduler.MountAltAz:
		return drives{path[i] + 360*float64(turn), t.ElDeg[i]}
	case scheduler.MountEquatorial:
		return drives{t.HADeg[i], t.DecDeg[i]}
	}
	return drives{0, t.DecDeg[i]}
}

// slewSeconds is the time from one pointing to the next, settling included.
func slewSeconds(tel *scheduler.Telescope, from, to drives) float64 {
	var a1, a2 sky.Axis
	switch tel.Mount {
	case scheduler.MountAltAz:
		a1, a2 = sky.Axis{RateDegS: tel.RateAzDegS, AccelDegS2: tel.AccelAzDegS2}, sky.Axis{RateDegS: tel.RateElDegS, AccelDegS2: tel.AccelElDegS2}
	case scheduler.MountEquatorial:
		a1, a2 = sky.Axis{RateDegS: tel.RateHADegS, AccelDegS2: tel.AccelHADegS2}, sky.Axis{RateDegS: tel.RateDecDegS, AccelDegS2: tel.AccelDecDegS2}
	default:
		return tel.SettleS + sky.Axis{RateDegS: tel.RateElDegS, AccelDegS2: tel.AccelElDegS2}.Seconds(to.axis2-from.axis2)
	}
	return tel.SettleS + math.Max(a1.Seconds(to.axis1-from.axis1), a2.Seconds(to.axis2-from.axis2))
}

// roundOrbit is the eccentricity below which periastron says nothing.
const roundOrbit = 0.01

// phases is where the orbit stands at the scan's ends.
func phases(src *scheduler.Source, x PlannedScan) (*PhaseRange, error) {
	el, err := src.Binary.Elements()
	if err != nil {
		return nil, fmt.Errorf("source %s: %w", src.Name, err)
	}
	ref, name := orbit.Periastron, "periastron"
	if el.Ecc < roundOrbit {
		ref, name = orbit.Node, "ascending node"
	}
	from, err := el.Turns(ref, src.Star(), x.Start)
	if err != nil {
		return nil, err
	}
	to, err := el.Turns(ref, src.Star(), x.End())
	if err != nil {
		return nil, err
	}
	return &PhaseRange{Reference: name, From: from - math.Floor(from), To: to - math.Floor(to)}, nil
}

// FormatRA writes a right ascension as hours, minutes and seconds.
func FormatRA(ra astro.Angle) string {
	tenths := int(math.Round(ra.Wrap().Hours()*36000)) % (24 * 36000)
	return fmt.Sprintf("%02d:%02d:%02d.%d", tenths/36000, tenths/600%60, tenths/10%60, tenths%10)
}

// FormatDec writes a declination as degrees, minutes and seconds.
func FormatDec(dec astro.Angle) string {
	sign := "+"
	if dec < 0 {
		sign, dec = "-", -dec
	}
	s := int(math.Round(dec.Deg() * 3600))
	return fmt.Sprintf("%s%02d:%02d:%02d", sign, s/3600, s/60%60, s%60)
}
