package seawater

// Coefficients of cp and density at one atmosphere: M. H. Sharqawy, J. H. Lienhard V and S. M.
// Zubair, Desalination and Water Treatment 16 (2010) 354-380; cp is that of D. T. Jamieson et
// al., Desalination 7 (1969) 23-30. Both hold from 0 °C to 180 °C, to 180 g/kg and 160 g/kg;
// the authors state 0.28 % for cp and 0.1 % for density. Checked against TEOS-10.
//
//	cp = 1000 Σ (c[i][0] + c[i][1] S + c[i][2] S²) Tⁱ,   S in g/kg, T in kelvins of the scale of 1968
//	ρ  = Σ fresh[i] tⁱ + S Σ salt[i] tⁱ + saltier S² t²,   S in kg/kg, t in °C
var (
	jamieson = [4][3]float64{
		{5.328, -9.76e-2, 4.04e-4},
		{-6.913e-3, 7.351e-4, -3.15e-6},
		{9.6e-6, -1.927e-6, 8.23e-9},
		{2.5e-9, 1.666e-9, -7.125e-12},
	}
	fresh = [5]float64{999.9, 2.034e-2, -6.162e-3, 2.261e-5, -4.657e-8}
	salt  = [5]float64{802.0, -2.001, 1.677e-2, -3.06e-5, 0}
)

const (
	saltier   = -1.613e-5
	scale1968 = 1.00024 // as the authors turn kelvins of today into those of 1968
)

// nayarCp is the change of cp with pressure: K. G. Nayar et al., Desalination 390 (2016) 1-24,
// to 12 MPa.
//
//	∂cp/∂p = Σ (c[i][0] + c[i][1] S) tⁱ,   J/(kg K MPa), S in g/kg, t in °C
//
// Above 100 °C the authors count pressure from saturation, here from one atmosphere throughout:
// 0.01 % of cp at 120 °C.
var nayarCp = [4][2]float64{
	{-3.1118, 0.0107},
	{0.0157, -3.9716e-5},
	{5.1014e-5, 3.2088e-8},
	{-1.0302e-6, 1.0119e-9},
}

// The change of ln ρ with pressure, from the same paper; coefficients from memory. The rise of
// density with pressure is within 1.7 % of what TEOS-10 has, 7e-5 of density at 12 MPa.
//
//	κ = Σ (nayarSqueeze[i] + S nayarSalt[i]) tⁱ + p (Σ nayarRelief[i] tⁱ + nayarSaltRelief S)
//
// in 1/MPa, with p in MPa, S in g/kg and t in °C.
var (
	nayarSqueeze = [6]float64{5.0792e-4, -3.4168e-6, 5.6931e-8, -3.7263e-10, 1.4465e-12, -1.7058e-15}
	nayarSalt    = [3]float64{-1.1077e-6, 5.5584e-9, -4.2539e-11}
	nayarRelief  = [4]float64{-1.3389e-6, 4.8603e-9, 0, -6.8039e-13}
)

const nayarSaltRelief = 8.3702e-9
