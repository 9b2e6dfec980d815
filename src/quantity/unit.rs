//! Units: reading text such as `"115 degC"` into SI.

/// What a quantity measures; decides the units it may be written in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Dimension {
    /// A bare number.
    Number,
    /// Absolute temperature, K.
    Temperature,
    /// Pressure, Pa.
    Pressure,
    /// Mass density, kg/m3.
    Density,
    /// Molar mass, kg/mol.
    MolarMass,
    /// Molar volume, m3/mol.
    MolarVolume,
    /// Molar energy, J/mol.
    MolarEnergy,
    /// Molar heat capacity or entropy, J/(mol K).
    MolarHeatCapacity,
    /// Dynamic viscosity, Pa s.
    Viscosity,
    /// Surface tension, N/m.
    SurfaceTension,
    /// Solubility parameter, Pa^0.5 inside, MPa^0.5 in tables.
    SolubilityParameter,
}
