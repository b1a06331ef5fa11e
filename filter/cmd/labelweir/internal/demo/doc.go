// Package demo shows the whole job on an invented apple packing line. Sensors measure every apple, one of several
// graders writes a grade down, and one of them begins to confuse two grades halfway. Everything is drawn from a seed, so
// it is known which grades are wrong; the package writes the harvest to an Arrow file, has it swept like any other, and
// compares what was found with what was planted.
package demo
