package wire

// Criterion names what is judged: the member of Criteria that gives its limit.
type Criterion string

// The criteria.
const (
	LeastFreeboard           Criterion = "least_freeboard"
	RuledFreeboard           Criterion = "freeboard_rule"
	GreatestFill             Criterion = "greatest_fill"
	LeastVelocity            Criterion = "least_velocity"
	GreatestVelocity         Criterion = "greatest_velocity"
	LeastShear               Criterion = "least_shear"
	GreatestShear            Criterion = "greatest_shear"
	CriticalBand             Criterion = "critical_band"
	GreatestVedernikovNumber Criterion = "greatest_vedernikov_number"
	LeastLiningSafety        Criterion = "least_lining_safety"
)

// A criterion is one row of the table of them.
type criterion struct {
	name     Criterion
	quantity Quantity // of its value and its limit
	given    func(*Criteria) bool
	flows    func(*CriterionFlows) []string
}

// criteria are all of them, in the order of the contract.
var criteria = []criterion{
	{LeastFreeboard, QuantityLength, func(c *Criteria) bool { return c.LeastFreeboard.Given }, func(f *CriterionFlows) []string { return f.LeastFreeboard }},
	{RuledFreeboard, QuantityLength, func(c *Criteria) bool { return c.FreeboardRule != "" }, func(f *CriterionFlows) []string { return f.FreeboardRule }},
	{GreatestFill, Dimensionless, func(c *Criteria) bool { return c.GreatestFill.Given }, func(f *CriterionFlows) []string { return f.GreatestFill }},
	{LeastVelocity, QuantityVelocity, func(c *Criteria) bool { return c.LeastVelocity.Given }, func(f *CriterionFlows) []string { return f.LeastVelocity }},
	{GreatestVelocity, QuantityVelocity, func(c *Criteria) bool { return c.GreatestVelocity.Given }, func(f *CriterionFlows) []string { return f.GreatestVelocity }},
	{LeastShear, QuantityStress, func(c *Criteria) bool { return c.LeastShear.Given }, func(f *CriterionFlows) []string { return f.LeastShear }},
	{GreatestShear, QuantityStress, func(c *Criteria) bool { return c.GreatestShear.Given }, func(f *CriterionFlows) []string { return f.GreatestShear }},
	{CriticalBand, Dimensionless, func(c *Criteria) bool { return c.CriticalBand.Given }, func(f *CriterionFlows) []string { return f.CriticalBand }},
	{GreatestVedernikovNumber, Dimensionless, func(c *Criteria) bool { return c.GreatestVedernikovNumber.Given }, func(f *CriterionFlows) []string { return f.GreatestVedernikovNumber }},
	{LeastLiningSafety, Dimensionless, func(c *Criteria) bool { return c.LeastLiningSafety.Given }, func(f *CriterionFlows) []string { return f.LeastLiningSafety }},
}

// AllCriteria returns the criteria in the order of the contract.
func AllCriteria() []Criterion {
	out := make([]Criterion, len(criteria))
	for i := range criteria {
		out[i] = criteria[i].name
	}
	return out
}

// row returns a criterion's row; nil for a name that is none.
func (c Criterion) row() *criterion {
	for i := range criteria {
		if criteria[i].name == c {
			return &criteria[i]
		}
	}
	return nil
}

// Quantity returns what a criterion's value and limit measure.
func (c Criterion) Quantity() Quantity {
	if row := c.row(); row != nil {
		return row.quantity
	}
	return Dimensionless
}

// Has reports whether a criterion is to be judged.
func (c *Criteria) Has(name Criterion) bool {
	row := name.row()
	return row != nil && row.given(c)
}

// Of returns the names of the flows that a criterion is about; nil where it is about all.
func (f *CriterionFlows) Of(name Criterion) []string {
	if row := name.row(); row != nil {
		return row.flows(f)
	}
	return nil
}
