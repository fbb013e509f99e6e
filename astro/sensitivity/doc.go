// Package sensitivity says how well a pulsar can be timed: how bright the sky
// and the receiver are, what signal-to-noise ratio and arrival-time
// uncertainty a stretch of time gives, and what the interstellar medium, the
// solar wind and the span of the data make of it.
//
// The functions are plain formulas. Each names its source; "from memory"
// marks one that was not read in the work it cites. They check nothing: NaN
// or values outside the stated ranges give meaningless results, not errors,
// because their callers read validated campaigns.
//
// Radiometer is the planner's hot path: everything that does not change
// during a scan is worked out once for a pulsar and a receiver.
//
// Units stand in the names. Frequencies are centres of the band in MHz,
// pulse widths full widths at half maximum in seconds. Left out: the loss of
// sensitivity from intra-channel dispersion smearing (coherent dedispersion
// is common practice), the radiometer's dependence on the calibrator, and
// atmospheric emission that is not proportional to 1/sin(elevation).
package sensitivity
