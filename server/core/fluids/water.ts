import type { Correlation } from './correlation.ts'

/**
 * Viscosity of liquid water at 0.1 MPa: μ = 1e-6 Σ a_i (T/300 K)^b_i [Pa s]. 253.15 to 383.15 K (metastable below 273.15 K), 1
 * %.
 * Source: IAPWS SR6-08(2011), the 0.1 MPa form of IAPWS 2008. Perry's and VDI's equations are 5 to 6 % low at 0 °C.
 */
export const waterViscosity: Correlation = {
  lowK: 253.15,
  highK: 383.15,
  at(tempK) {
    const t = tempK / 300
    return 1e-6 * (280.68 * t ** -1.9 + 511.45 * t ** -7.7 + 61.131 * t ** -19.6 + 0.45903 * t ** -40)
  },
}

/**
 * Conductivity of liquid water at 0.1 MPa: λ = Σ c_i (T/300 K)^d_i [W/(m K)]. 273.15 to 383.15 K, 1.5 %. Source: IAPWS
 * SR6-08(2011).
 */
export const waterConductivity: Correlation = {
  lowK: 273.15,
  highK: 383.15,
  at(tempK) {
    const t = tempK / 300
    return 1.663 * t ** -1.15 - 1.7781 * t ** -3.4 + 1.1567 * t ** -6 - 0.432115 * t ** -7.6
  },
}

/**
 * Density of liquid water at 0.1 MPa [kg/m3], t in °C; 0 to 150 °C, 0.01 %. Source: G. S. Kell, J. Chem. Eng. Data 20 (1975) 97.
 */
export const waterDensity: Correlation = {
  lowK: 273.15,
  highK: 423.15,
  at(tempK) {
    const t = tempK - 273.15
    const top = 999.83952 + t * (16.945176 + t * (-7.9870401e-3 + t * (-46.170461e-6 + t * (105.56302e-9 - t * 280.54253e-12))))
    return top / (1 + 16.87985e-3 * t)
  },
}
