package friction

// Colebrook lets tests count the Newton steps.
var Colebrook = colebrook
