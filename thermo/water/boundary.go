package water

import "math"

// boundary23 is the auxiliary equation between regions 2 and 3: R7-97(2012),
// equations 5 and 6, table 1; 623.15 K and 16.5292 MPa to 863.15 K and 100 MPa.
var boundary23 = [...]float64{348.05185628969, -1.1671859879975, 0.0010192970039326, 572.54459862746, 13.9188397787}

func boundary23Pressure(T float64) float64 {
	n := &boundary23
	return 1e6 * (n[0] + T*(n[1]+T*n[2]))
}

func boundary23Temperature(p float64) float64 {
	n := &boundary23
	return n[3] + math.Sqrt((p/1e6-n[4])/n[2])
}
