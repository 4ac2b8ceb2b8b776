// Package peak makes one figure out of several: the direction of the strongest
// signal out of levels read at several angles, a tilt out of readings with two
// faces of one instrument, an angle out of a phone's acceleration, a mean out of shaky samples, a mean direction out of
// bearings.
//
// Angles are radians inside, levels dBm and their differences dB.
package peak
