package wire

import "leat/compute"

// FaultsUnder returns the faults of a constructor of compute as faults of a request: base is the JSON Pointer of the object that was being built.
func FaultsUnder(base string, faults compute.Faults) []Fault {
	out := make([]Fault, 0, len(faults))
	for _, f := range faults {
		pointer := base
		if f.Member != "" {
			pointer += "/" + f.Member
		}
		out = append(out, Fault{Pointer: pointer, Code: f.Code, Detail: f.Detail})
	}
	return out
}
