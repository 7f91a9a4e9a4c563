// Package priors holds distributions of one parameter and the map from the unit
// cube to a model's parameters.
//
// The road of the data:
//
//  1. Decode (decode.go) turns the keys of one table, already read from a file, into
//     a Prior; or the caller builds one with NewUniform and the others, one file
//     per family. A bad number or key gives a *FieldError that names the key; the
//     caller, who knows the file, adds file and line.
//  2. NewSet (set.go) joins named priors in the model's order of parameters.
//  3. Set.Map turns a point u of the unit cube, one number per free parameter, into
//     theta, one number per parameter in the parameter's own unit.
//
// A prior has the unit of its parameter and knows nothing of it. Densities are in
// nats per unit of the parameter.
package priors
