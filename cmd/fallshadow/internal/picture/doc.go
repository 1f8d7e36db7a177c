// Package picture draws what a fit saw of a shot: density and residuals in false colour,
// the outlines of both parts, cuts through the centre, and all of it on one sheet.
package picture
