// Package demo is an invented vessel under way, for whoever wants to try the
// program before they need it: her instruments speak NMEA 0183 through a real
// TCP socket, and when someone marks, an invented person is in the water there
// and drifts by a truth that the program does not know.
//
// The vessel, her name, the person and the weather are invented and look it.
// The vessel comes back by herself, by the same advice that a helm would see.
package demo
