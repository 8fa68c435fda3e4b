package answer

// Site is the plant of an agent, by its site file.
type Site struct {
	Name    string `json:"name"`
	Zone    string `json:"zone"` // IANA name of the time zone
	Version string `json:"version"`
	// File is the SHA-256 of the site file, in hexadecimal.
	File       string          `json:"site_file_sha256"`
	Shown      ShownIn         `json:"shown_in"`
	Loads      []SiteLoad      `json:"loads"`
	Exchangers []SiteExchanger `json:"exchangers"`
}

// ShownIn names the units that people are shown figures in.
type ShownIn struct {
	Duty        string `json:"duty"`
	Heat        string `json:"heat"`
	Temperature string `json:"temperature"`
	Flow        string `json:"flow"`
}

// SiteLoad is a load in the order of the site file.
type SiteLoad struct {
	Load      string      `json:"load"`
	Kind      string      `json:"kind"` // stream or vessel
	Fluid     string      `json:"fluid"`
	Direction string      `json:"direction"` // gives or takes heat
	BothWays  bool        `json:"both_ways"`
	Design    *SiteDesign `json:"design"` // null of a load without
}

// SiteDesign is what a load is held to.
type SiteDesign struct {
	By        string   `json:"by"`        // duty, table, week, baseline or exchanger
	Duty      *float64 `json:"duty_W"`    // by duty alone
	Exchanger string   `json:"exchanger"` // by an exchanger alone, else empty
	Allowance float64  `json:"allowance"` // fraction of what is expected
	Lasting   float64  `json:"lasting_s"` // how long a deviation must stand
}

// SiteExchanger is an exchanger of which both streams are loads.
type SiteExchanger struct {
	Name      string   `json:"name"`
	Hot       string   `json:"hot"` // load that is the side
	Cold      string   `json:"cold"`
	Duty      float64  `json:"duty_W"`                    // at the design point
	Allowance *float64 `json:"fouling_allowance_K_per_W"` // null for none
}
