"""Values of the CODATA list in SI units. Written by `python -m eqsheet.units.resolve`."""

VALUES: dict[str, float] = {
    "speed of light in vacuum": 299792458.0,
    "Planck constant": 6.62607015e-34,
    "reduced Planck constant": 1.0545718176461565e-34,
    "elementary charge": 1.602176634e-19,
    "Boltzmann constant": 1.380649e-23,
    "Avogadro constant": 6.02214076e23,
    "molar gas constant": 8.31446261815324,
    "Faraday constant": 96485.33212331001,
    "Stefan-Boltzmann constant": 5.6703744191844314e-08,
    "Newtonian constant of gravitation": 6.6743e-11,
    "standard acceleration of gravity": 9.80665,
    "standard atmosphere": 101325.0,
    "vacuum electric permittivity": 8.8541878188e-12,
    "vacuum mag. permeability": 1.25663706127e-06,
    "electron mass": 9.1093837139e-31,
    "proton mass": 1.67262192595e-27,
    "atomic mass constant": 1.66053906892e-27,
    "Wien wavelength displacement law constant": 0.0028977719551851727,
}
