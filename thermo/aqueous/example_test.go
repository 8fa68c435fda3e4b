package aqueous_test

import (
	"fmt"

	"heatreeve/thermo"
	"heatreeve/thermo/aqueous"
)

func ExampleNew() {
	glycol, err := aqueous.New("propylene glycol", 0.32, 0.006)
	if err != nil {
		fmt.Println(err)
		return
	}
	freezing, _ := glycol.Span(3e5)
	cp, density := glycol.Uncertainty(293.15, 2e5)
	fmt.Printf("%s freezes at %.1f °C; cp ± %.2f %%, density ± %.2f %%\n", glycol.Name(), freezing-273.15, 100*cp, 100*density)

	q, err := thermo.StreamHeat(glycol, 5, 285.15, 3e5, 280.15, 3e5)
	fmt.Printf("12 to 7 °C at 5 kg/s: %.1f kW, %v\n", q/1e3, err)

	_, err = glycol.At(253.15, 3e5)
	fmt.Println(err)
	// Output:
	// propylene glycol 32 % freezes at -13.3 °C; cp ± 0.57 %, density ± 0.31 %
	// 12 to 7 °C at 5 kg/s: -95.0 kW, <nil>
	// propylene glycol 32 %: temperature -20 °C is below -13.3144 °C (freezing point, were the mixture weaker by twice the uncertainty of its strength)
}
