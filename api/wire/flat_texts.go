package wire

import (
	"strconv"
	"strings"
)

// This file holds the sentences of cells that cannot be read, with advice for what databases and spreadsheets write.

const emptyAdvice = " Leave the cell empty where a value is unknown."

// absentWords are what databases, spreadsheets and statistics programs write for a value that is not there (common practice).
var absentWords = map[string]bool{
	"null": true, `\n`: true, "none": true, "nil": true, "nan": true, "na": true, "n/a": true, "-": true, "--": true, "?": true,
	"inf": true, "infinity": true, "nodata": true, "no data": true, "unknown": true,
}

func isAbsentWord(cell string) bool {
	word := strings.ToLower(strings.TrimSpace(cell))
	return absentWords[word] || absentWords[strings.TrimLeft(word, "+-")]
}

// numberCellText says why a cell is no number, and what to write.
func numberCellText(cell string, whole bool) string {
	wanted := "This must be a number"
	if whole {
		wanted = "This must be a whole number"
	}
	if isBlankCell(cell) {
		return wanted + ", but the cell holds blanks." + emptyAdvice
	}
	return wanted + ", not " + strconv.Quote(clip(cell)) + "." + numberCellAdvice(cell)
}

func numberCellAdvice(cell string) string {
	trimmed := strings.TrimSpace(cell)
	text := strings.ToLower(trimmed)
	number, after, _ := strings.Cut(text, " ")
	bare, percent := strings.CutSuffix(number, "%")
	switch {
	case isAbsentWord(cell):
		return emptyAdvice
	case strings.HasPrefix(text, "#"):
		return " A spreadsheet writes that where a formula fails." + emptyAdvice
	case isNumber(trimmed):
		return " Take out the blanks around it."
	case isRatio(text):
		return " Write a ratio as one decimal number: 0.02 for 1:50."
	case percent || strings.TrimSpace(after) == "%":
		return " Write a percentage as a fraction: 0.02 for 2 %."
	case hasThousands(text):
		return " Write numbers with a point before the decimals and without separators of thousands."
	case strings.Count(text, ",") == 1 && isNumber(strings.Replace(text, ",", ".", 1)):
		return " Write a point before the decimals, not a comma: " + strings.Replace(trimmed, ",", ".", 1) + "."
	case after != "" && isNumber(bare), startsWithNumber(text):
		return " Write the number alone, without its unit; the member units says in which system numbers stand."
	}
	if plain := strings.TrimPrefix(text, "+"); plain != text && isNumber(plain) {
		return " Leave the plus sign out."
	}
	if isNumber("0"+text) || isNumber(text+"0") || isNumber(strings.Replace(text, "-.", "-0.", 1)) {
		return " Write a digit on both sides of the decimal point, as in 0.5."
	}
	if digits := strings.TrimLeft(text, "0"); digits != text && isNumber(digits) {
		return " Leave superfluous zeros before it out."
	}
	return ""
}

// hasThousands reports whether a text is a number whose thousands are set apart, by whatever sign.
func hasThousands(text string) bool {
	for _, sign := range []string{",", ".", " ", "'", "\u2019", "\u00a0", "\u202f", "_"} {
		if !strings.Contains(text, sign) {
			continue
		}
		joined := strings.ReplaceAll(text, sign, "")
		groups := strings.Split(text, sign)
		whole := isNumber(joined) || isNumber(strings.Replace(joined, ",", ".", 1))
		if !whole || (sign == "," || sign == ".") && len(groups) == 2 && !strings.ContainsAny(joined, ".,") {
			continue // no number, or one separator that may be the decimal one
		}
		apart := true
		for _, group := range groups[1:] {
			digits, _, _ := strings.Cut(strings.ReplaceAll(group, ",", "."), ".")
			apart = apart && len(digits) == 3
		}
		if apart {
			return true
		}
	}
	return false
}

// startsWithNumber reports whether letters follow a number at once: 900mm.
func startsWithNumber(text string) bool {
	end := strings.LastIndexAny(text, "0123456789")
	for i := 1; i <= end+1 && i < len(text); i++ {
		if c := text[i]; (c < '0' || c > '9') && c != '.' && isNumber(text[:i]) {
			return 'a' <= c && c <= 'z' || c == '"' || c == '\'' || c >= 0x80
		}
	}
	return false
}

// truthCellText says why a cell is neither true nor false.
func truthCellText(cell string) string {
	text := "This must be true or false, not " + strconv.Quote(clip(cell)) + "."
	switch word := strings.ToLower(strings.TrimSpace(cell)); {
	case isAbsentWord(cell) || word == "":
		return text + emptyAdvice
	case word == "t" || word == "f":
		return text + " PostgreSQL writes t and f unless the column is cast to text."
	case word == "true" || word == "false":
		return text + " Write it in small letters, without blanks."
	case word == "1" || word == "yes" || word == "y":
		return text + " Write true."
	case word == "0" || word == "no" || word == "n":
		return text + " Write false."
	}
	return text
}

// listCellText says why a cell is no list or object as JSON text.
func listCellText(f *field, cell []byte) string {
	wanted := f.wanted()
	text := "This must be " + wanted + " as JSON text. "
	switch word := string(cell); {
	case isAbsentWord(word) || isBlankCell(word):
		return text + strings.TrimSpace(emptyAdvice)
	case cell[0] == '{' && f.shape != shapeObject && f.shape != shapeNamed:
		return text + "PostgreSQL writes its arrays in braces; cast them by to_json to get brackets."
	}
	d := decodings.Get().(*decoding)
	limits := DefaultLimits()
	detail := ""
	if !d.scanner.scan(cell, &limits) {
		detail = d.scanner.fault.problem(cell).Detail
	}
	d.scanner.release()
	decodings.Put(d)
	return text + detail
}
