// Package medium gives viscosity and density of the fluids that trapping
// laboratories use, as functions of temperature at atmospheric pressure.
//
// Units are SI: temperatures in kelvin, viscosities in Pa s, densities in
// kg/m3. Compositions are mass fractions (glycerol, sucrose) or molalities
// (salt, mol per kg of water). Each correlation carries its source, a range
// outside which it refuses to answer, and a standard uncertainty of its own,
// which is a statement about the correlation and the fluid it describes, not
// about the temperature or the composition that the caller puts in.
//
// Sources of the correlations:
//
//   - water: IAPWS SR6-08(2011), Patek et al., J. Phys. Chem. Ref. Data 38
//     (2009) 21;
//   - heavy water: IAPWS viscosity release of 1984 as revised in 2007, brought to
//     IAPWS R17-20 around room temperature, with the density of Kell, J. Chem. Eng.
//     Data 12 (1967) 66;
//   - glycerol: Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285, with the density of
//     Volk and Kaehler, Exp. Fluids 59 (2018) 75;
//   - sucrose: Barber, Natl. Cancer Inst. Monogr. 21 (1966) 219;
//   - saline: Kestin, Khalifa and Correia, J. Phys. Chem. Ref. Data 10 (1981)
//     71, with the density of Laliberte and Cooper, J. Chem. Eng. Data 49 (2004)
//     1141.
package medium

// Boltzmann is the Boltzmann constant [J/K], exact (SI 2019).
const Boltzmann = 1.380649e-23

// zeroCelsius is 0 C on the thermodynamic scale [K], exact (ITS-90).
const zeroCelsius = 273.15
