package helmholtz

// substance is what a paper gives of one fluid. Amounts are molar and in SI
// units; δ = ρ/reducingDensity and τ = reducingT/T.
type substance struct {
	formula, name, source      string
	molarMass, gasConstant     float64 // kg/mol; J/(mol K) as the paper has it
	reducingT, reducingDensity float64 // K; mol/m³
	criticalT, criticalP       float64 // K; Pa
	tripleT                    float64 // K
	maxT, maxP                 float64 // K; Pa
	stated                     accuracy
	ideal                      idealTerms
	powers                     []power
	gaussians                  []gaussian
	nonAnalytics               []nonAnalytic
	dew                        curve // Pa
	vapour, liquid             curve // densities at saturation, mol/m³
}

// accuracy is the expanded uncertainty (k = 2) of states off the critical region,
// as fractions: cp and density as the papers have it, the larger where a paper
// divides its range; ideal is that of cp of the dilute gas, 2/√3 of how far the ideal
// part is from other tables.
type accuracy struct{ cp, ideal, density float64 }

// idealTerms is the ideal part of the Helmholtz energy,
//
//	φ° = ln δ + logTau·ln τ + Σ n τ^t + Σ n ln(1 + d·exp(−θτ)) + c1 + c2 τ
//
// The papers' c1 and c2 set the zeros of entropy and enthalpy and are left out:
// enthalpy has the zero of this package, entropy is not given.
type idealTerms struct {
	logTau      float64
	powers      []idealPower
	oscillators []oscillator
}

type idealPower struct{ n, t float64 }

// oscillator is a Planck-Einstein function where d = −1. Air has one with n
// ln(2/3 + exp(θτ)) = n ln(1 + 2/3·exp(−θτ)) + nθτ.
type oscillator struct{ n, theta, d float64 }

// power is n δ^d τ^t exp(−δ^l), without the exponential where l = 0.
type power struct {
	n float64
	d int
	t float64
	l int
}

// gaussian is n δ^d τ^t exp(−η(δ−ε)² − β(τ−γ)²); where b is not 0 its temperature
// part is exp(1/(b + β(τ−γ)²)) instead, the form that ammonia needs.
type gaussian struct {
	n                            float64
	d                            int
	t, eta, epsilon, beta, gamma float64
	b                            float64
}

// nonAnalytic is a term of the critical region of carbon dioxide,
//
//	n Δ^b δ exp(−C(δ−1)² − D(τ−1)²),   Δ = θ² + B((δ−1)²)^a,
//	θ = 1 − τ + A((δ−1)²)^(1/(2β))
type nonAnalytic struct{ n, a, b, beta, A, B, C, D float64 }
