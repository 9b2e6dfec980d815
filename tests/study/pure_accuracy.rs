//! Errors of the pure-component methods on measured data.
//!
//! Takes the folder of reference files and the folder to write to, reads the
//! group counts of `groups_joback.csv`, and writes `errors.csv` with mean,
//! median and 90th percentile of the error for each property, method, choice of
//! measured inputs, family and size, `worst.csv` with the largest errors, and `left_out.csv` with the
//! reference points that were not used and why:
//!
//! ```text
//! cargo run --release --example pure_accuracy -- REFERENCE_FOLDER OUTPUT_FOLDER
//! ```

use std::collections::BTreeMap;
use std::error::Error;
use std::path::{Path, PathBuf};

use groupsmith::chem::{Composition, Element};
use groupsmith::groups::GroupCounts;
use groupsmith::pure::corresponding_states::{
    Constants, LiquidDensityMethod, VaporPressureMethod, acentric_factor_edmister,
    enthalpy_of_vaporization_watson,
};
use groupsmith::pure::{Estimates, Given, PureMethods, StructureFacts, estimate_all};
use groupsmith::quantity::{Estimate, Property, REFERENCE_TEMPERATURE_K, Status};

/// Reference points left out, with the reason: (file, column, InChIKey, reason).
const LEFT_OUT: &[(&str, &str, &str, &str)] = &[(
    "critical.csv",
    "Tc_K",
    "YNPNZTXNASCQKK-UHFFFAOYSA-N",
    "phenanthrene: 0.869 K stands where 869 K must be meant",
)];

type Fault = Box<dyn Error>;

struct Molecule {
    name: String,
    smiles: String,
    counts: GroupCounts,
    facts: StructureFacts,
    family: &'static str,
}

/// What is measured about a molecule and may be given to a method.
#[derive(Clone, Copy, Default)]
struct Constant {
    boiling_point_k: Option<f64>,
    critical_temperature_k: Option<f64>,
    critical_pressure_pa: Option<f64>,
}

#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Inputs {
    Structure,
    BoilingPoint,
    CriticalPoint,
}

impl Inputs {
    const ALL: [Self; 3] = [Self::Structure, Self::BoilingPoint, Self::CriticalPoint];

    const fn text(self) -> &'static str {
        match self {
            Self::Structure => "structure only",
            Self::BoilingPoint => "measured T_b",
            Self::CriticalPoint => "measured T_b T_c P_c",
        }
    }

    /// The measured values of this choice; `None` if one of them is not known.
    fn given(self, known: Constant) -> Option<Vec<(Property, Estimate)>> {
        let measured = |value| Estimate {
            status: Status::Measured,
            ..Estimate::new(value, "measured")
        };
        let mut given = Vec::new();
        if self >= Self::BoilingPoint {
            given.push((Property::BoilingPoint, measured(known.boiling_point_k?)));
        }
        if self >= Self::CriticalPoint {
            given.push((
                Property::CriticalTemperature,
                measured(known.critical_temperature_k?),
            ));
            given.push((
                Property::CriticalPressure,
                measured(known.critical_pressure_pa?),
            ));
        }
        Some(given)
    }
}

/// How an error is expressed.
#[derive(Clone, Copy)]
enum Scale {
    Difference { unit: &'static str, per_si: f64 },
    Percent,
    Log10,
    Ln,
}

impl Scale {
    fn error(self, estimate: f64, measured: f64) -> f64 {
        match self {
            Self::Difference { per_si, .. } => (estimate - measured) * per_si,
            Self::Percent => 100.0 * (estimate / measured - 1.0),
            Self::Log10 => (estimate / measured).log10(),
            Self::Ln => (estimate / measured).ln(),
        }
    }

    const fn unit(self) -> &'static str {
        match self {
            Self::Difference { unit, .. } => unit,
            Self::Percent => "percent",
            Self::Log10 => "log10",
            Self::Ln => "ln",
        }
    }
}

const KELVIN: Scale = Scale::Difference {
    unit: "K",
    per_si: 1.0,
};
const KILOJOULE: Scale = Scale::Difference {
    unit: "kJ/mol",
    per_si: 1e-3,
};
const NUMBER: Scale = Scale::Difference {
    unit: "-",
    per_si: 1.0,
};

#[derive(Clone, PartialEq, Eq, PartialOrd, Ord)]
struct Key {
    figure: &'static str,
    method: &'static str,
    inputs: Inputs,
}

struct Deviation {
    molecule: String,
    family: &'static str,
    size: &'static str,
    error: f64,
    text: String,
}

#[derive(Default)]
struct Study {
    deviations: BTreeMap<Key, (&'static str, Vec<Deviation>)>,
    asked: BTreeMap<Key, usize>,
}

impl Study {
    fn add(
        &mut self,
        key: Key,
        scale: Scale,
        id: &str,
        molecule: &Molecule,
        estimate: Option<f64>,
        measured: f64,
    ) {
        *self.asked.entry(key.clone()).or_default() += 1;
        let Some(estimate) = estimate else { return };
        let (_, deviations) = self
            .deviations
            .entry(key)
            .or_insert_with(|| (scale.unit(), Vec::new()));
        deviations.push(Deviation {
            molecule: id.to_owned(),
            family: molecule.family,
            size: size(&molecule.facts),
            error: scale.error(estimate, measured),
            text: format!(
                "{},{},{estimate:.6e}",
                quoted(&molecule.name),
                quoted(&molecule.smiles)
            ),
        });
    }

    fn write(&self, folder: &Path) -> Result<(), Fault> {
        let mut errors = String::from(
            "figure,method,inputs,class,member,unit,points,molecules,mean_abs,median_abs,p90_abs,bias,no_value\n",
        );
        let mut worst =
            String::from("figure,method,inputs,unit,error,family,name,smiles,estimate_si\n");
        for (key, (unit, deviations)) in &self.deviations {
            let head = format!("{},{},{}", key.figure, key.method, key.inputs.text());
            let mut classes: BTreeMap<(&str, &str), Vec<&Deviation>> = BTreeMap::new();
            for deviation in deviations {
                for class in [
                    ("all", "all"),
                    ("family", deviation.family),
                    ("heavy atoms", deviation.size),
                ] {
                    classes.entry(class).or_default().push(deviation);
                }
            }
            let missing = self.asked[key] - deviations.len();
            for ((class, member), members) in classes {
                let mut molecules: Vec<&str> = members.iter().map(|d| &*d.molecule).collect();
                molecules.sort_unstable();
                molecules.dedup();
                let mut sizes: Vec<f64> = members.iter().map(|d| d.error.abs()).collect();
                sizes.sort_by(f64::total_cmp);
                let n = sizes.len() as f64;
                let at = |part: f64| sizes[((n - 1.0) * part).round() as usize];
                errors += &format!(
                    "{head},{class},{member},{unit},{},{},{:.4},{:.4},{:.4},{:.4},{}\n",
                    sizes.len(),
                    molecules.len(),
                    sizes.iter().sum::<f64>() / n,
                    at(0.5),
                    at(0.9),
                    members.iter().map(|d| d.error).sum::<f64>() / n,
                    if class == "all" {
                        missing.to_string()
                    } else {
                        String::new()
                    },
                );
            }
            let mut order: Vec<&Deviation> = deviations.iter().collect();
            order.sort_by(|a, b| b.error.abs().total_cmp(&a.error.abs()));
            for deviation in order.iter().take(5) {
                worst += &format!(
                    "{head},{unit},{:.4},{},{}\n",
                    deviation.error, deviation.family, deviation.text
                );
            }
        }
        let mut left_out = String::from("file,column,inchikey,reason\n");
        for (file, column, id, reason) in LEFT_OUT {
            left_out += &format!("{file},{column},{id},{}\n", quoted(reason));
        }
        std::fs::write(folder.join("left_out.csv"), left_out)?;
        std::fs::write(folder.join("errors.csv"), errors)?;
        std::fs::write(folder.join("worst.csv"), worst)?;
        Ok(())
    }
}

fn left_out(file: &str, column: &str, id: &str) -> bool {
    LEFT_OUT
        .iter()
        .any(|point| (point.0, point.1, point.2) == (file, column, id))
}

fn quoted(text: &str) -> String {
    format!("\"{}\"", text.replace('"', "\"\""))
}

/// Rows of a reference file, by column name.
fn rows(folder: &Path, file: &str) -> Result<Vec<BTreeMap<String, String>>, Fault> {
    let path = folder.join(file);
    let mut reader =
        csv::Reader::from_path(&path).map_err(|e| format!("{}: {e}", path.display()))?;
    Ok(reader.deserialize().collect::<Result<_, _>>()?)
}

fn number(row: &BTreeMap<String, String>, column: &str) -> Option<f64> {
    row.get(column)?.parse().ok()
}

/// Standard atomic weights in g/mol, conventional values of IUPAC/CIAAW.
fn molar_mass_kg_per_mol(composition: &Composition) -> f64 {
    let weights = [
        1.008,
        10.81,
        12.011,
        14.007,
        15.999,
        18.998_403_162,
        28.085,
        30.973_761_998,
        32.06,
        35.45,
        79.904,
        126.904_47,
    ];
    1e-3 * Element::ALL
        .into_iter()
        .zip(weights)
        .map(|(element, weight)| f64::from(composition.count(element)) * weight)
        .sum::<f64>()
}

/// One family for a molecule: the kind of its functional groups, or `several kinds`.
fn family(counts: &GroupCounts) -> &'static str {
    let kind = |number: u16| match number {
        16 => Some("fluorides"),
        17..=19 => Some("chlorides bromides iodides"),
        20 => Some("alcohols"),
        21 => Some("phenols"),
        22 | 23 => Some("ethers"),
        24..=26 => Some("ketones and aldehydes"),
        27 => Some("acids"),
        28 => Some("esters"),
        30..=33 => Some("amines"),
        29 | 34..=38 => Some("other N or =O"),
        39..=41 => Some("sulfur"),
        _ => None,
    };
    let mut found = None;
    for (number, _) in counts.iter() {
        match (found, kind(number)) {
            (None, new) => found = new,
            (Some(old), Some(new)) if old != new => return "several kinds",
            _ => {}
        }
    }
    let any = |numbers: &[u16]| numbers.iter().any(|&number| counts.count(number) > 0);
    found.unwrap_or(if any(&[14, 15]) {
        "hydrocarbons with ring =C"
    } else if any(&[5, 6, 7, 8, 9, 10]) {
        "open-chain unsaturated hydrocarbons"
    } else {
        "saturated hydrocarbons"
    })
}

fn size(facts: &StructureFacts) -> &'static str {
    match facts.heavy_atoms {
        0..=4 => "01-04",
        5..=8 => "05-08",
        9..=14 => "09-14",
        15..=20 => "15-20",
        _ => "21 or more",
    }
}

fn value(all: &Estimates, property: Property) -> Option<f64> {
    all[property as usize].as_ref().ok().map(|e| e.value)
}

struct Reference {
    molecules: BTreeMap<String, Molecule>,
    constants: BTreeMap<String, Constant>,
    folder: PathBuf,
}

impl Reference {
    fn read(folder: PathBuf, methods: &PureMethods) -> Result<Self, Fault> {
        let mut molecules = BTreeMap::new();
        for row in rows(&folder, "groups_joback.csv")? {
            let counts = GroupCounts::from_text(&row["joback_groups"]).ok_or("bad group counts")?;
            let composition = methods.joback.atoms_of(&counts).ok_or("unknown group")?;
            molecules.insert(
                row["inchikey"].clone(),
                Molecule {
                    name: row["name"].clone(),
                    smiles: row["smiles"].clone(),
                    family: family(&counts),
                    facts: StructureFacts::new(composition, molar_mass_kg_per_mol(&composition)),
                    counts,
                },
            );
        }
        let mut constants: BTreeMap<String, Constant> = BTreeMap::new();
        for row in rows(&folder, "boiling_point.csv")? {
            constants
                .entry(row["inchikey"].clone())
                .or_default()
                .boiling_point_k = number(&row, "Tb_K");
        }
        for row in rows(&folder, "critical.csv")? {
            let known = constants.entry(row["inchikey"].clone()).or_default();
            known.critical_temperature_k = number(&row, "Tc_K")
                .filter(|_| !left_out("critical.csv", "Tc_K", &row["inchikey"]));
            known.critical_pressure_pa = number(&row, "Pc_Pa");
        }
        Ok(Self {
            molecules,
            constants,
            folder,
        })
    }

    fn constant(&self, id: &str) -> Constant {
        self.constants.get(id).copied().unwrap_or_default()
    }

    /// Adds one file: for each row and choice of inputs, the estimate of `property` at the row's temperature.
    #[expect(
        clippy::too_many_arguments,
        reason = "a study line names all of them once"
    )]
    fn compare(
        &self,
        study: &mut Study,
        methods: &PureMethods,
        file: &str,
        keep: impl Fn(&BTreeMap<String, String>) -> bool,
        column: &str,
        figure: &'static str,
        method: &'static str,
        scale: Scale,
        inputs: &[Inputs],
        estimate: impl Fn(&Estimates, f64) -> Option<f64>,
    ) -> Result<(), Fault> {
        for row in rows(&self.folder, file)?.iter().filter(|row| keep(row)) {
            let id = &row["inchikey"];
            let Some(molecule) = self.molecules.get(id) else {
                continue;
            };
            let Some(measured) = number(row, column) else {
                continue;
            };
            if left_out(file, column, id) {
                continue;
            }
            let temperature_k = number(row, "T_K").unwrap_or(REFERENCE_TEMPERATURE_K);
            for &inputs in inputs {
                let Some(given) = inputs.given(self.constant(id)) else {
                    continue;
                };
                let all = estimate_all(
                    methods,
                    Ok(&molecule.counts),
                    &molecule.facts,
                    Given(&given),
                    temperature_k,
                );
                let key = Key {
                    figure,
                    method,
                    inputs,
                };
                study.add(
                    key,
                    scale,
                    id,
                    molecule,
                    estimate(&all, temperature_k),
                    measured,
                );
            }
        }
        Ok(())
    }

    /// Acentric factors from measured vapor pressures on both sides of 0.7 T_c, T_c and P_c measured.
    fn acentric_factors(&self) -> Result<BTreeMap<String, f64>, Fault> {
        let mut points: BTreeMap<String, Vec<(f64, f64)>> = BTreeMap::new();
        for row in rows(&self.folder, "vapor_pressure.csv")? {
            if let (Some(t), Some(p)) = (number(&row, "T_K"), number(&row, "Psat_Pa")) {
                points
                    .entry(row["inchikey"].clone())
                    .or_default()
                    .push((t, p));
            }
        }
        let mut found = BTreeMap::new();
        for (id, mut points) in points {
            let known = self.constant(&id);
            let (Some(tc), Some(pc)) = (known.critical_temperature_k, known.critical_pressure_pa)
            else {
                continue;
            };
            points.sort_by(|a, b| a.0.total_cmp(&b.0));
            let at = 0.7 * tc;
            for pair in points.windows(2) {
                let [(t0, p0), (t1, p1)] = [pair[0], pair[1]];
                if t0 <= at && at <= t1 {
                    let part = (1.0 / at - 1.0 / t0) / (1.0 / t1 - 1.0 / t0);
                    let ln_p = p0.ln() + part * (p1 / p0).ln();
                    found.insert(id, -1.0 - (ln_p - pc.ln()) / std::f64::consts::LN_10);
                    break;
                }
            }
        }
        Ok(found)
    }
}

fn main() -> Result<(), Fault> {
    let mut arguments = std::env::args_os().skip(1).map(PathBuf::from);
    let (Some(folder), Some(out)) = (arguments.next(), arguments.next()) else {
        return Err("usage: pure_accuracy REFERENCE_FOLDER OUTPUT_FOLDER".into());
    };
    let mut methods = PureMethods::built_in();
    let reference = Reference::read(folder, &methods)?;
    let mut study = Study::default();
    let any = |_: &BTreeMap<String, String>| true;
    let all_inputs = &Inputs::ALL[..];
    let structure = &Inputs::ALL[..1];
    let boiling = &Inputs::ALL[..2];
    let joback = groupsmith::pure::joback::ID;

    for (file, column, property, scale, inputs) in [
        (
            "boiling_point.csv",
            "Tb_K",
            Property::BoilingPoint,
            KELVIN,
            structure,
        ),
        (
            "melting_point.csv",
            "Tm_K",
            Property::MeltingPoint,
            KELVIN,
            structure,
        ),
        (
            "critical.csv",
            "Tc_K",
            Property::CriticalTemperature,
            Scale::Percent,
            boiling,
        ),
        (
            "critical.csv",
            "Pc_Pa",
            Property::CriticalPressure,
            Scale::Percent,
            structure,
        ),
        (
            "critical.csv",
            "Vc_m3_mol",
            Property::CriticalVolume,
            Scale::Percent,
            structure,
        ),
        (
            "ideal_gas_formation.csv",
            "Hf298_J_mol",
            Property::IdealGasEnthalpyOfFormation,
            KILOJOULE,
            structure,
        ),
        (
            "ideal_gas_formation.csv",
            "Gf298_J_mol",
            Property::IdealGasGibbsEnergyOfFormation,
            KILOJOULE,
            structure,
        ),
        (
            "viscosity_liquid.csv",
            "mu_Pa_s",
            Property::LiquidViscosity,
            Scale::Ln,
            structure,
        ),
    ] {
        reference.compare(
            &mut study,
            &methods,
            file,
            any,
            column,
            property.id(),
            joback,
            scale,
            inputs,
            |all, _| value(all, property),
        )?;
    }
    reference.compare(
        &mut study,
        &methods,
        "surface_tension.csv",
        any,
        "sigma_N_m",
        "surface_tension",
        "sastri-rao",
        Scale::Percent,
        all_inputs,
        |all, _| value(all, Property::SurfaceTension),
    )?;
    reference.compare(
        &mut study,
        &methods,
        "flash_point.csv",
        any,
        "T_flash_K",
        "flash_point",
        "catoire-naudet",
        KELVIN,
        boiling,
        |all, _| value(all, Property::FlashPoint),
    )?;
    reference.compare(
        &mut study,
        &methods,
        "enthalpy_vaporization.csv",
        |row| row["basis"] == "Tb",
        "Hvap_J_mol",
        "enthalpy_of_vaporization at T_b",
        joback,
        Scale::Percent,
        structure,
        |all, _| value(all, Property::EnthalpyOfVaporization),
    )?;
    reference.compare(
        &mut study,
        &methods,
        "enthalpy_vaporization.csv",
        |row| row["basis"] == "298.15",
        "Hvap_J_mol",
        "enthalpy_of_vaporization at 298.15 K",
        "joback-reid + watson",
        Scale::Percent,
        boiling,
        |all, t| {
            enthalpy_of_vaporization_watson(
                value(all, Property::EnthalpyOfVaporization)?,
                value(all, Property::BoilingPoint)?,
                value(all, Property::CriticalTemperature)?,
                t,
            )
        },
    )?;
    for method in VaporPressureMethod::ALL {
        methods.vapor_pressure = method;
        reference.compare(
            &mut study,
            &methods,
            "vapor_pressure.csv",
            any,
            "Psat_Pa",
            "vapor_pressure",
            method.id(),
            Scale::Log10,
            all_inputs,
            |all, _| value(all, Property::VaporPressure),
        )?;
    }
    methods.vapor_pressure = VaporPressureMethod::default();
    for method in LiquidDensityMethod::ALL {
        methods.liquid_density = method;
        for (file, figure) in [
            ("liquid_density.csv", "liquid_density at 298.15 K"),
            ("density_T.csv", "liquid_density at T"),
        ] {
            reference.compare(
                &mut study,
                &methods,
                file,
                any,
                "rho_kg_m3",
                figure,
                method.id(),
                Scale::Percent,
                all_inputs,
                |all, _| value(all, Property::LiquidDensity),
            )?;
        }
    }
    methods.liquid_density = LiquidDensityMethod::default();

    let acentric_factors = reference.acentric_factors()?;
    for (id, &measured) in &acentric_factors {
        let Some(molecule) = reference.molecules.get(id) else {
            continue;
        };
        for inputs in Inputs::ALL {
            let Some(given) = inputs.given(reference.constant(id)) else {
                continue;
            };
            let mut estimates: Vec<(&'static str, Option<f64>)> = Vec::new();
            for method in VaporPressureMethod::ALL {
                methods.vapor_pressure = method;
                let all = estimate_all(
                    &methods,
                    Ok(&molecule.counts),
                    &molecule.facts,
                    Given(&given),
                    REFERENCE_TEMPERATURE_K,
                );
                if estimates.is_empty() {
                    let edmister = || {
                        let constants = Constants::new(
                            value(&all, Property::BoilingPoint)?,
                            value(&all, Property::CriticalTemperature)?,
                            value(&all, Property::CriticalPressure)?,
                            "edmister",
                        );
                        Some(acentric_factor_edmister(&constants.ok()?))
                    };
                    estimates.push(("edmister", edmister()));
                }
                estimates.push((method.id(), value(&all, Property::AcentricFactor)));
            }
            for (method, estimate) in estimates {
                let key = Key {
                    figure: "acentric_factor",
                    method,
                    inputs,
                };
                study.add(key, NUMBER, id, molecule, estimate, measured);
            }
        }
    }
    std::fs::create_dir_all(&out)?;
    study.write(&out)
}
