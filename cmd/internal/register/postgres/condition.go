package postgres

import (
	"fmt"
	"strconv"
	"strings"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A clause collects the conditions of a query and their parameters.
type clause struct {
	conditions []string
	parameters []any
}

// where spells the conditions: " where a and b", or nothing.
func (c *clause) where() string {
	if len(c.conditions) == 0 {
		return ""
	}
	return " where " + strings.Join(c.conditions, " and ")
}

// parameter adds a parameter and spells its place by a pattern such as "$%d::text".
func (c *clause) parameter(pattern string, value any) string {
	c.parameters = append(c.parameters, value)
	return fmt.Sprintf(pattern, len(c.parameters))
}

// between demands that a key lies after one value and not after another; null is no bound.
func (c *clause) between(order, pattern string, after, until row.Value) {
	if !after.IsNull() {
		c.conditions = append(c.conditions, order+" > "+c.parameter(pattern, keyParameter(after)))
	}
	if !until.IsNull() {
		c.conditions = append(c.conditions, order+" <= "+c.parameter(pattern, keyParameter(until)))
	}
}

// keyParameter is a key as a parameter.
func keyParameter(key row.Value) any {
	if key.Kind == row.Int {
		return key.Int()
	}
	return string(key.Bytes())
}

// keyParameters are keys as a parameter that is an array.
func keyParameters(kind row.Kind, keys []row.Value) any {
	if kind == row.Int {
		numbers := make([]int64, len(keys))
		for i, key := range keys {
			numbers[i] = key.Int()
		}
		return numbers
	}
	texts := make([]string, len(keys))
	for i, key := range keys {
		texts[i] = string(key.Bytes())
	}
	return texts
}

// filter adds the conditions of a mapping file.
func (c *clause) filter(columns map[string]*column, filter []store.Condition) error {
	for _, condition := range filter {
		column, found := columns[condition.Column]
		if !found {
			return &store.Misfit{Field: "filter", Detail: fmt.Sprintf("The filter names the column %q, which is not there.", condition.Column)}
		}
		text, err := c.condition(column, &condition)
		if err != nil {
			return err
		}
		c.conditions = append(c.conditions, text)
	}
	return nil
}

var comparisons = map[store.Op]string{store.Above: ">", store.AtLeast: ">=", store.Below: "<", store.AtMost: "<="}

func (c *clause) condition(column *column, condition *store.Condition) (string, error) {
	quoted := quote(column.Name)
	switch condition.Op {
	case store.IsNull:
		return quoted + " is null", nil
	case store.NotNull:
		return quoted + " is not null", nil
	}
	values := make([]string, len(condition.Values))
	for i, value := range condition.Values {
		text, err := comparable(column, value)
		if err != nil {
			return "", err
		}
		values[i] = text
	}
	// Values travel as texts, which the server turns into the type of the column's comparison.
	left, kind := quoted+"::text", "text"
	switch {
	case column.numeric && column.Kind == row.Float && column.Declared != "numeric" && !strings.HasPrefix(column.Declared, "numeric("):
		left, kind = quoted, "float8"
	case column.numeric:
		left, kind = quoted, "numeric"
	case column.Kind == row.Bool:
		left, kind = quoted, "boolean"
	}
	switch condition.Op {
	case store.AnyOf:
		return left + " = any(" + c.parameter("$%d::text[]", values) + "::" + kind + "[])", nil
	case store.NoneOf:
		return left + " <> all(" + c.parameter("$%d::text[]", values) + "::" + kind + "[])", nil
	}
	sign, known := comparisons[condition.Op]
	if !known || len(values) != 1 {
		return "", fmt.Errorf("a condition on %s cannot be spelled", quoted)
	}
	if kind == "text" {
		left += ` collate "C"`
	}
	return left + " " + sign + " " + c.parameter("$%d::text", values[0]) + "::" + kind, nil
}

// comparable spells a value that a filter compares a column with.
func comparable(column *column, value row.Value) (string, error) {
	misfit := func(wanted string) error {
		return &store.Misfit{Field: "filter", Detail: fmt.Sprintf("The column %q is of the type %s, and the filter compares it with %q; %s is needed.", column.Name, column.Declared, value.String(), wanted)}
	}
	switch {
	case column.Kind == row.Bytes:
		return "", &store.Misfit{Field: "filter", Detail: fmt.Sprintf("The column %q is of the type %s, of which a filter can only ask whether it is null.", column.Name, column.Declared)}
	case column.numeric:
		if value.Kind != row.Int && value.Kind != row.Float {
			if _, err := strconv.ParseFloat(value.String(), 64); err != nil || value.Kind != row.Text {
				return "", misfit("a number")
			}
		}
	case column.Kind == row.Bool:
		if value.Kind != row.Bool {
			return "", misfit("true or false")
		}
	case column.Kind == row.Time:
		return "", &store.Misfit{Field: "filter", Detail: fmt.Sprintf("The column %q holds moments; let a view compare them.", column.Name)}
	}
	return value.String(), nil
}
