package answer

import (
	"heatreeve/agent/account"
	"heatreeve/agent/loads"
)

// ShareNames lists what an uncertainty may be made of, in a fixed order.
func ShareNames() []string {
	var all []string
	for p := range loads.Parts {
		all = append(all, p.String())
	}
	return append(all, account.RandomShare, account.UnpartedShare)
}
