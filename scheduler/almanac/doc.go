// Package almanac answers a coordinator's quick questions about one source:
// when is it up at a telescope and what keeps it down, where does it stand,
// and where is its binary in its orbit. The command line, pages and the REST
// service show its answers.
//
// It looks at instants, not at scans: a plan asks for more (a whole scan within
// the motor's range, room to slew), which is the business of the planner.
// Times are UTC; angles are degrees; hour angle is west-positive.
package almanac
