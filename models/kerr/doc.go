// Package kerr knows the spinning remnant: geometry, quasi-normal modes, angular functions and barrier response.
package kerr
