package wire

// Codes of faults in a body that is not acceptable JSON (400).
const (
	codeEmptyBody        = "empty_body"
	codeSyntaxError      = "syntax_error"
	codeTrailingData     = "trailing_data"
	codeByteOrderMark    = "byte_order_mark"
	codeInvalidUTF8      = "invalid_utf8"
	codeLoneSurrogate    = "lone_surrogate"
	codeDuplicateMember  = "duplicate_member"
	codeNestingTooDeep   = "nesting_too_deep"
	codeNotFinite        = "not_finite"
	codeNumberTooLong    = "number_too_long"
	codeNumberOutOfRange = "number_out_of_range"
	codeNumberUnderflow  = "number_underflow"
)

// Codes of sizes beyond a limit (413).
const (
	codeTooManyItems = "too_many_items"
	codeTooMuchWork  = "too_much_work"
)

// Codes of rules that valid JSON breaks (422). Geometry and friction have further ones of their own.
const (
	codeNotAnObject       = "not_an_object"
	codeWrongType         = "wrong_type"
	codeUnknownMember     = "unknown_member"
	codeMissingMember     = "missing_member"
	codeForeignMember     = "foreign_member"
	codeConflictingMember = "conflicting_member"
	codeUnknownValue      = "unknown_value"
	codeNotWhole          = "not_whole"
	codeTooLong           = "too_long"
	codeTooFewItems       = "too_few_items"
	codeWrongLength       = "wrong_length"
	codeNotPositive       = "not_positive"
	codeOutOfRange        = "out_of_range"
	codeNotRising         = "not_rising"
	codeMisplacedMember   = "misplaced_member"
	codeSectionDiffers    = "section_differs"
	codeNoLength          = "no_length"
	codeUnknownFlow       = "unknown_flow"
	codeCriterionNotGiven = "criterion_not_given"
)
