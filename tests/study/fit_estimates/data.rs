//! The reference data: molecules and measured values.

use std::collections::BTreeMap;
use std::error::Error;
use std::path::Path;

use groupsmith::chem::{Canonicalizer, Keys, Molecule, Reader};
use groupsmith::groups::environment::{EnvironmentCounts, EnvironmentReader};
use groupsmith::pure::fitted::Quantity;

use super::curves;

/// A constitution with everything the fit needs of it.
pub(crate) struct Known {
    /// Canonical SMILES without stereochemistry: what values and folds go by.
    pub(crate) constitution: String,
    pub(crate) name: String,
    pub(crate) counts: EnvironmentCounts,
    pub(crate) molar_mass_kg_per_mol: f64,
    pub(crate) acid: bool,
    /// Which of the five parts it is in.
    pub(crate) fold: usize,
}

impl Known {
    fn new(
        constitution: &str,
        name: &str,
        molecule: &Molecule,
        environments: &mut EnvironmentReader,
    ) -> Self {
        let mut counts = EnvironmentCounts::default();
        environments.counts_into(molecule, &mut counts);
        Self {
            fold: fold(constitution),
            constitution: constitution.to_owned(),
            name: name.to_owned(),
            counts,
            molar_mass_kg_per_mol: molecule.molar_mass_kg_per_mol(),
            acid: molecule.has_carboxyl(),
        }
    }
}

/// Values of one quantity: number of the molecule and value in SI units.
pub(crate) type Values = Vec<(usize, f64)>;

pub(crate) struct Reference {
    pub(crate) molecules: Vec<Known>,
    pub(crate) values: Vec<Values>,
    /// Vapor pressures: molecule, K, Pa.
    pub(crate) vapor_pressures: Vec<(usize, f64, f64)>,
    /// Enthalpies of vaporization at the normal boiling point, J/mol.
    pub(crate) enthalpies: Values,
    /// Densities at 298.15 K, kg/m³.
    pub(crate) densities_298: Values,
    /// Densities of the saturated liquid: molecule, K, kg/m³.
    pub(crate) densities: Vec<(usize, f64, f64)>,
    /// Values that were not used, with the reason.
    pub(crate) left_out: Vec<String>,
}

impl Reference {
    /// Measured boiling points in K by the number of the molecule.
    pub(crate) fn measured_boiling_points(&self) -> BTreeMap<usize, f64> {
        self.values[Quantity::BoilingPoint as usize]
            .iter()
            .copied()
            .collect()
    }
}

pub(crate) const FOLDS: usize = 5;

/// Points that cannot be what they say: (file, InChIKey, reason).
const BAD_POINTS: [(&str, &str, &str); 1] = [(
    "critical.csv",
    "YNPNZTXNASCQKK-UHFFFAOYSA-N",
    "phenanthrene: 0.869 K stands where 869 K must be meant",
)];

struct Source {
    quantity: Quantity,
    file: &'static str,
    column: &'static str,
    /// A column with the text it must begin with.
    only: Option<(&'static str, &'static str)>,
}

const fn source(
    quantity: Quantity,
    file: &'static str,
    column: &'static str,
    only: Option<(&'static str, &'static str)>,
) -> Source {
    Source {
        quantity,
        file,
        column,
        only,
    }
}

const SOURCES: [Source; Quantity::COUNT] = [
    source(Quantity::BoilingPoint, "boiling_point.csv", "Tb_K", None),
    source(
        Quantity::MolarVolume,
        "liquid_density.csv",
        "Vm_m3_mol",
        None,
    ),
    source(Quantity::CriticalTemperature, "critical.csv", "Tc_K", None),
    source(Quantity::CriticalPressure, "critical.csv", "Pc_Pa", None),
    source(Quantity::CriticalVolume, "critical.csv", "Vc_m3_mol", None),
    source(
        Quantity::EnthalpyOfVaporizationAt298,
        "enthalpy_vaporization.csv",
        "Hvap_J_mol",
        Some(("basis", "298.15")),
    ),
    source(
        // turned into slopes when all is read
        Quantity::VaporPressureSlope,
        "enthalpy_vaporization.csv",
        "Hvap_J_mol",
        Some(("basis", "Tb")),
    ),
    source(Quantity::FlashPoint, "flash_point.csv", "T_flash_K", None),
    source(Quantity::MeltingPoint, "melting_point.csv", "Tm_K", None),
    source(
        Quantity::Viscosity,
        "viscosity_liquid.csv",
        "mu_Pa_s",
        Some(("T_K", "298.15")),
    ),
    source(
        Quantity::SurfaceTension,
        "surface_tension.csv",
        "sigma_N_m",
        None,
    ),
    source(
        Quantity::HansenDispersion,
        "hansen.csv",
        "delta_d_Pa0.5",
        None,
    ),
    source(Quantity::HansenPolar, "hansen.csv", "delta_p_Pa0.5", None),
    source(
        Quantity::HansenHydrogenBonding,
        "hansen.csv",
        "delta_h_Pa0.5",
        None,
    ),
    source(Quantity::LogPOctanolWater, "logp.csv", "log10_Kow", None),
    source(
        Quantity::IdealGasEnthalpyOfFormation,
        "ideal_gas_formation.csv",
        "Hf298_J_mol",
        None,
    ),
];

/// Reads every file of the folder.
pub(crate) fn read(folder: &Path) -> Result<Reference, Box<dyn Error>> {
    let mut reader = Reader::new();
    let mut canonicalizer = Canonicalizer::new();
    let mut environments = EnvironmentReader::new();
    let mut molecule = Molecule::default();
    let mut keys = Keys::default();
    let mut known: BTreeMap<String, Known> = BTreeMap::new();
    let mut rows: Vec<BTreeMap<String, Vec<f64>>> = vec![BTreeMap::new(); Quantity::COUNT];
    let mut left_out = Vec::new();
    for source in &SOURCES {
        let mut table = csv::Reader::from_path(folder.join(source.file))?;
        let headers = table.headers()?.clone();
        let column = |name: &str| {
            headers
                .iter()
                .position(|header| header == name)
                .ok_or_else(|| format!("{}: there is no column {name}", source.file))
        };
        let [smiles, name, inchikey, value] =
            ["smiles", "name", "inchikey", source.column].map(column);
        let (smiles, name, inchikey, value) = (smiles?, name?, inchikey?, value?);
        let only = match source.only {
            Some((name, begin)) => Some((column(name)?, begin)),
            None => None,
        };
        for row in table.records() {
            let row = row?;
            if row[value].is_empty() || only.is_some_and(|(at, begin)| !row[at].starts_with(begin))
            {
                continue;
            }
            let number: f64 = row[value].parse()?;
            let mut leave = |reason: &str| {
                left_out.push(format!(
                    "{},\"{}\",{},{number},\"{reason}\"",
                    source.quantity.id(),
                    &row[name],
                    &row[smiles]
                ));
            };
            let bad = BAD_POINTS
                .iter()
                .find(|bad| bad.0 == source.file && bad.1 == &row[inchikey]);
            if let Some(bad) = bad
                && source.column == "Tc_K"
            {
                leave(bad.2);
                continue;
            }
            if let Err(fault) = reader.read_into(&row[smiles], &mut molecule) {
                leave(&fault.to_string());
                continue;
            }
            canonicalizer.keys_into(&molecule, &mut keys);
            let constitution = keys.constitution.clone();
            known.entry(constitution.clone()).or_insert_with(|| {
                Known::new(&constitution, &row[name], &molecule, &mut environments)
            });
            rows[source.quantity as usize]
                .entry(constitution)
                .or_default()
                .push(number);
        }
    }
    let mut curves = [Vec::new(), Vec::new()];
    for (file, values, points) in [
        ("vapor_pressure.csv", "Psat_Pa", 0),
        ("density_T.csv", "rho_kg_m3", 1),
    ] {
        let mut table = csv::Reader::from_path(folder.join(file))?;
        let headers = table.headers()?.clone();
        let column = |name: &str| {
            headers
                .iter()
                .position(|header| header == name)
                .ok_or_else(|| format!("{file}: there is no column {name}"))
        };
        let [smiles, name, temperature, value] = ["smiles", "name", "T_K", values].map(column);
        let (smiles, name, temperature, value) = (smiles?, name?, temperature?, value?);
        for row in table.records() {
            let row = row?;
            if reader.read_into(&row[smiles], &mut molecule).is_err() {
                continue;
            }
            canonicalizer.keys_into(&molecule, &mut keys);
            let constitution = keys.constitution.clone();
            known.entry(constitution.clone()).or_insert_with(|| {
                Known::new(&constitution, &row[name], &molecule, &mut environments)
            });
            curves[points].push((constitution, row[temperature].parse()?, row[value].parse()?));
        }
    }
    let numbers: BTreeMap<String, usize> = known.keys().cloned().zip(0..).collect();
    let mut values: Vec<Values> = rows
        .into_iter()
        .map(|rows| {
            // stereoisomers of one constitution count once, by their mean
            rows.into_iter()
                .map(|(constitution, values)| {
                    let mean = values.iter().sum::<f64>() / values.len() as f64;
                    (numbers[&constitution], mean)
                })
                .collect()
        })
        .collect();
    let [vapor_pressures, densities] = curves.map(|points: Vec<(String, f64, f64)>| {
        points
            .into_iter()
            .map(|(constitution, t, value)| (numbers[&constitution], t, value))
            .collect::<Vec<(usize, f64, f64)>>()
    });
    let molecules: Vec<Known> = known.into_values().collect();
    let enthalpies = std::mem::take(&mut values[Quantity::VaporPressureSlope as usize]);
    let boiling: BTreeMap<usize, f64> = values[Quantity::BoilingPoint as usize]
        .iter()
        .copied()
        .collect();
    values[Quantity::VaporPressureSlope as usize] =
        curves::slopes(&vapor_pressures, &enthalpies, &boiling, &molecules);
    let densities_298 = values[Quantity::MolarVolume as usize]
        .iter()
        .map(|&(molecule, volume)| (molecule, molecules[molecule].molar_mass_kg_per_mol / volume))
        .collect();
    values[Quantity::MolarVolume as usize] = curves::volumes(
        &values[Quantity::MolarVolume as usize],
        &densities,
        &boiling,
        &molecules,
    );
    Ok(Reference {
        vapor_pressures,
        enthalpies,
        densities_298,
        densities,
        molecules,
        values,
        left_out,
    })
}

/// A part of the data by the constitution alone (FNV-1a, 32 bits).
fn fold(constitution: &str) -> usize {
    let hash = constitution.bytes().fold(0x811c_9dc5_u32, |hash, byte| {
        (hash ^ u32::from(byte)).wrapping_mul(0x0100_0193)
    });
    (hash >> 8) as usize % FOLDS
}
