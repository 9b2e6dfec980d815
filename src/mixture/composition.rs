//! Compositions by mole, mass and volume, and what they need to be converted.

use super::MixtureError;

/// How far a sum of fractions may be from 1.
pub const SUM_TOLERANCE: f64 = 1e-6;

macro_rules! fractions {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Clone, Debug, PartialEq)]
        pub struct $name(Vec<f64>);

        impl $name {
            /// Takes fractions that add up to 1 within 1e-6, as they are.
            ///
            /// # Errors
            ///
            /// A negative or non-finite fraction, no fractions, or another sum.
            pub fn new(values: Vec<f64>) -> Result<Self, MixtureError> {
                let sum = checked_sum(&values)?;
                if (sum - 1.0).abs() > SUM_TOLERANCE {
                    return Err(MixtureError::Sum { sum });
                }
                Ok(Self(values))
            }

            /// Takes amounts of any sum and divides them by it.
            ///
            /// # Errors
            ///
            /// A negative or non-finite amount, no amounts, or all zero.
            pub fn from_amounts(mut values: Vec<f64>) -> Result<Self, MixtureError> {
                let sum = checked_sum(&values)?;
                if sum <= 0.0 {
                    return Err(MixtureError::Empty);
                }
                for value in &mut values {
                    *value /= sum;
                }
                Ok(Self(values))
            }

            /// The fractions, in component order.
            pub fn as_slice(&self) -> &[f64] {
                &self.0
            }
        }
    };
}

fractions! {
    /// Mole fractions.
    MoleFractions
}
fractions! {
    /// Mass fractions.
    MassFractions
}
fractions! {
    /// Volume fractions, by the volumes of the unmixed components.
    VolumeFractions
}

impl MoleFractions {
    /// From mass fractions: x_i ∝ w_i / M_i.
    ///
    /// # Errors
    ///
    /// A molar mass that is not positive, or not one for each component.
    pub fn from_mass(
        mass: &MassFractions,
        molar_masses_kg_per_mol: &[f64],
    ) -> Result<Self, MixtureError> {
        check_each("the molar mass", molar_masses_kg_per_mol, mass.0.len())?;
        Self::from_amounts(ratio(&mass.0, molar_masses_kg_per_mol))
    }

    /// From volume fractions: x_i ∝ φ_i / v_i.
    ///
    /// # Errors
    ///
    /// A molar volume that is not positive, or not one for each component.
    pub fn from_volume(
        volume: &VolumeFractions,
        molar_volumes_m3_per_mol: &[f64],
    ) -> Result<Self, MixtureError> {
        check_each("the molar volume", molar_volumes_m3_per_mol, volume.0.len())?;
        Self::from_amounts(ratio(&volume.0, molar_volumes_m3_per_mol))
    }

    /// As mass fractions: w_i ∝ x_i M_i.
    ///
    /// # Errors
    ///
    /// A molar mass that is not positive, or not one for each component.
    pub fn to_mass(&self, molar_masses_kg_per_mol: &[f64]) -> Result<MassFractions, MixtureError> {
        check_each("the molar mass", molar_masses_kg_per_mol, self.0.len())?;
        MassFractions::from_amounts(product(&self.0, molar_masses_kg_per_mol))
    }

    /// As volume fractions: φ_i ∝ x_i v_i.
    ///
    /// # Errors
    ///
    /// A molar volume that is not positive, or not one for each component.
    pub fn to_volume(
        &self,
        molar_volumes_m3_per_mol: &[f64],
    ) -> Result<VolumeFractions, MixtureError> {
        check_each("the molar volume", molar_volumes_m3_per_mol, self.0.len())?;
        VolumeFractions::from_amounts(product(&self.0, molar_volumes_m3_per_mol))
    }

    /// Molar mass of the mixture in kg/mol.
    ///
    /// # Errors
    ///
    /// A molar mass that is not positive, or not one for each component.
    pub fn molar_mass_kg_per_mol(
        &self,
        molar_masses_kg_per_mol: &[f64],
    ) -> Result<f64, MixtureError> {
        check_each("the molar mass", molar_masses_kg_per_mol, self.0.len())?;
        Ok(product(&self.0, molar_masses_kg_per_mol).iter().sum())
    }

    /// Molar volume of the mixture in m³/mol if the volumes of the components add up
    /// (no excess volume; for common organic mixtures that errs by a few tenths of a
    /// per cent, for alcohol with water by up to about 4 %).
    ///
    /// # Errors
    ///
    /// A molar volume that is not positive, or not one for each component.
    pub fn ideal_molar_volume_m3_per_mol(
        &self,
        molar_volumes_m3_per_mol: &[f64],
    ) -> Result<f64, MixtureError> {
        check_each("the molar volume", molar_volumes_m3_per_mol, self.0.len())?;
        Ok(product(&self.0, molar_volumes_m3_per_mol).iter().sum())
    }

    /// Density of the mixture in kg/m³ if the volumes of the components add up.
    ///
    /// # Errors
    ///
    /// As [`Self::molar_mass_kg_per_mol`] and [`Self::ideal_molar_volume_m3_per_mol`].
    pub fn ideal_density_kg_per_m3(
        &self,
        molar_masses_kg_per_mol: &[f64],
        molar_volumes_m3_per_mol: &[f64],
    ) -> Result<f64, MixtureError> {
        Ok(self.molar_mass_kg_per_mol(molar_masses_kg_per_mol)?
            / self.ideal_molar_volume_m3_per_mol(molar_volumes_m3_per_mol)?)
    }
}

fn checked_sum(values: &[f64]) -> Result<f64, MixtureError> {
    if values.is_empty() {
        return Err(MixtureError::NoComponents);
    }
    for (i, &value) in values.iter().enumerate() {
        if !(value >= 0.0 && value.is_finite()) {
            return Err(MixtureError::Value {
                what: "the fraction",
                component: i + 1,
                value,
                expected: "a number that is not negative",
            });
        }
    }
    Ok(values.iter().sum())
}

fn check_each(what: &'static str, values: &[f64], expected: usize) -> Result<(), MixtureError> {
    if values.len() != expected {
        return Err(MixtureError::Length {
            what,
            expected,
            found: values.len(),
        });
    }
    match values
        .iter()
        .position(|value| !(*value > 0.0 && value.is_finite()))
    {
        Some(at) => Err(MixtureError::Value {
            what,
            component: at + 1,
            value: values[at],
            expected: "a positive number",
        }),
        None => Ok(()),
    }
}

fn ratio(a: &[f64], b: &[f64]) -> Vec<f64> {
    a.iter().zip(b).map(|(a, b)| a / b).collect()
}

fn product(a: &[f64], b: &[f64]) -> Vec<f64> {
    a.iter().zip(b).map(|(a, b)| a * b).collect()
}
