package models

// membraneLaw is a viscous membrane close to the would-be horizon. A horizon has the
// shear viscosity eta0 = 1/(16 pi), in units of G = c = 1, and absorbs everything;
// a membrane of viscosity eta reflects the amplitude
//
//	(1 - eta/eta0) / (1 + eta/eta0)
//
// at every frequency (arXiv:2006.14628). With eta/eta0 = tanh(|k| / 4 T_H) it
// would be the Boltzmann surface (arXiv:1905.00464).
var membraneLaw = reflectivity{
	name: "membrane",
	parameters: []Parameter{
		{Name: "viscosity", Note: "shear viscosity of the surface over that of a horizon, 1/(16 pi)", Low: 0, High: 1},
	},
	none: 1,
	fill: func(law []float64, _, _, _ float64, rs []float64) {
		fillConstant((1-law[0])/(1+law[0]), rs)
	},
}
