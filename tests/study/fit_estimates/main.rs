//! Fits the estimates of `groupsmith::pure::fitted` and writes their parameter files.
//!
//! ```text
//! cargo run --release --features fit --example fit_estimates -- REFERENCE_FOLDER groups/estimates results/DATE-estimates [PREDICTIONS_FOLDER]
//! ```
//!
//! Reads the project's reference folder on pure substances and nothing else.
//! Deterministic: the same folder gives the same files. Cross-validation is in
//! five parts by constitution: stereoisomers stay together, a molecule is in
//! the same part for every quantity, and what a quantity rests on (boiling
//! point, molar volume) is estimated without the part, too.
//!
//! Parameter files hold weights and the environments of the molecules of the
//! fit, no measured value. The results folder gets the errors of the
//! cross-validation by quantity, level, family and size, the coverage and width of
//! the intervals, and the points that look wrong. A fourth folder, where one is given, gets the
//! predictions of the cross-validation, value by value (`predictions`).

mod curves;
mod data;
mod derived;
mod gaussian;
mod predictions;
mod report;
mod scale;

use std::collections::{BTreeMap, BTreeSet};
use std::error::Error;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use data::{FOLDS, Reference};
use gaussian::{Rows, Standard};
use groupsmith::groups::environment::{Environment, EnvironmentReader, Order, ShapeFact};
use groupsmith::pure::fitted::{
    Described, EnvironmentEntry, EnvironmentTable, Ground, Known, Level, Model, Quantity,
    Relatives, Standing, Support, Supporting, classes_of, has_new_kind_of_atom, has_unknown_atoms,
    rarity, similarity, unknown_environments, write_environments, write_model, write_molecules,
};
use groupsmith::run::Fingerprint;
use rayon::prelude::*;
use report::{Outcome, Report};

type Fault = Box<dyn Error>;

/// In how many molecules an environment has to occur to be a term.
const LEAST_MOLECULES: u32 = 3;

/// In how many molecules an environment has to occur to count in distances.
const LEAST_MOLECULES_FOR_DISTANCE: u32 = 5;

/// Prior variances of the parts of the covariance, in units of the variance of the targets.
#[derive(Clone, Copy)]
struct Setting {
    linear: f64,
    near: f64,
    input: f64,
    noise: f64,
}

/// Chosen by cross-validation among a few.
fn settings(quantity: Quantity, level: Level) -> Vec<Setting> {
    let setting = |near, noise| Setting {
        linear: 3.0,
        near: if level == Level::Structure { near } else { 0.0 },
        input: 1.0,
        noise,
    };
    match (quantity, level) {
        (Quantity::BoilingPoint, Level::Structure) => vec![setting(1.0, 0.006), setting(2.0, 0.01)],
        (Quantity::BoilingPoint, Level::Count) => vec![setting(0.0, 0.002)],
        (Quantity::MolarVolume, Level::Structure) => {
            vec![setting(0.1, 0.006), setting(0.1, 0.02), setting(0.3, 0.02)]
        }
        (Quantity::MolarVolume, Level::Count) => vec![setting(0.0, 0.003), setting(0.0, 0.01)],
        (Quantity::VaporPressureSlope, _) => vec![setting(0.3, 0.1), setting(1.0, 0.3)],
        (Quantity::MeltingPoint, _) => vec![setting(1.0, 0.1)],
        (Quantity::LogPOctanolWater, _) => vec![setting(1.0, 0.02), setting(0.3, 0.02)],
        (Quantity::IdealGasEnthalpyOfFormation, _) => {
            vec![
                setting(0.1, 0.0003),
                setting(0.3, 0.0003),
                setting(0.3, 0.001),
                setting(0.1, 0.001),
            ]
        }
        _ => [
            (1.0, 0.03),
            (0.3, 0.03),
            (1.0, 0.1),
            (0.3, 0.1),
            (1.0, 0.3),
            (1.0, 1.0),
            (3.0, 1.0),
            (3.0, 3.0),
        ]
        .map(|(near, noise)| setting(near, noise))
        .to_vec(),
    }
}

/// The reference data with the molecules looked up.
struct Fit {
    reference: Reference,
    table: EnvironmentTable,
    molecules: Vec<Described>,
    support: Support,
    /// Boiling point and molar volume without the part the molecule is in, by level.
    known: BTreeMap<Level, (Vec<f64>, Vec<f64>)>,
    /// Models without one part each, for what is derived from them.
    partial: BTreeMap<(Level, Quantity), Vec<PartialModel>>,
    /// Half widths of the intervals of molecules in a fit, in units of the sum.
    half_widths: BTreeMap<(Level, Quantity), BTreeMap<usize, f64>>,
}

/// A model that was fitted without one part of the data.
struct PartialModel {
    constant: f64,
    weights: Vec<f64>,
    support: Vec<(usize, f64)>,
    occurrences: Vec<u32>,
}

fn main() -> Result<(), Fault> {
    let arguments: Vec<PathBuf> = std::env::args_os().skip(1).map(PathBuf::from).collect();
    let (folder, parameters, results, predictions) = match arguments.as_slice() {
        [folder, parameters, results] => (folder, parameters, results, None),
        [folder, parameters, results, predictions] => {
            (folder, parameters, results, Some(predictions))
        }
        _ => {
            return Err("usage: fit_estimates REFERENCE_FOLDER PARAMETER_FOLDER RESULTS_FOLDER [PREDICTIONS_FOLDER]".into());
        }
    };
    std::fs::create_dir_all(parameters)?;
    std::fs::create_dir_all(results)?;
    let fingerprint = fingerprint(folder)?;
    let reference = data::read(folder)?;
    let table = environments(&reference)?;
    let molecules: Vec<Described> = reference
        .molecules
        .iter()
        .map(|molecule| {
            let mut described = Described::default();
            described.fill(&table, &molecule.counts);
            described
        })
        .collect();
    let date = date_of(results)?;
    let head = |title: &str| {
        format!(
            "# title: {title}\n# made by: fit_estimates, groupsmith {}\n# date: {date}\n# data: reference folder on pure substances, fingerprint {fingerprint}\n",
            env!("CARGO_PKG_VERSION")
        )
    };
    std::fs::write(
        parameters.join("environments.csv"),
        write_environments(&head("Atom environments of the fitted estimates"), &table),
    )?;
    std::fs::write(
        parameters.join("molecules.csv"),
        write_molecules(
            &head("Environments of the molecules of the fit, position or position:count"),
            &table,
            &molecules,
        ),
    )?;
    let support = Support::new(&table, &molecules);
    let mut fit = Fit {
        reference,
        table,
        molecules,
        support,
        known: BTreeMap::new(),
        partial: BTreeMap::new(),
        half_widths: BTreeMap::new(),
    };
    let mut report = Report::default();
    for level in Level::ALL {
        for quantity in Quantity::ALL {
            let fitted = fit.fit(quantity, level)?;
            let text = fitted.outcome.head();
            let title = format!("{} at {}", quantity.id(), level.id());
            std::fs::write(
                parameters.join(format!(
                    "{}-{}.csv",
                    if level == Level::Count {
                        "count"
                    } else {
                        "structure"
                    },
                    quantity.id()
                )),
                write_model(&format!("{}{text}", head(&title)), &fitted.model),
            )?;
            report.add(fitted.outcome);
        }
    }
    let derived = derived::points(&fit, Level::Structure);
    std::fs::write(
        results.join("derived.csv"),
        derived::errors(&fit, &derived)?,
    )?;
    report.write(results, &fit.reference)?;
    if let Some(folder) = predictions {
        predictions::write(folder, &fit, &report)?;
    }
    Ok(())
}

/// The date that the name of the results folder begins with: the same folders give the
/// same files, so that the clock is not asked.
fn date_of(results: &Path) -> Result<String, Fault> {
    let name = results.file_name().and_then(|name| name.to_str());
    let date = name.and_then(|name| name.get(..10)).filter(|date| {
        let digits = |part: &str| part.bytes().all(|byte| byte.is_ascii_digit());
        date.split('-').count() == 3 && date.split('-').all(digits)
    });
    Ok(date
        .ok_or("the name of the results folder has to begin with a date: 2026-12-01-estimates")?
        .to_owned())
}

fn fingerprint(folder: &Path) -> Result<String, Fault> {
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)?
        .map(|entry| entry.map(|entry| entry.path()))
        .collect::<Result<_, _>>()?;
    files.retain(|file| file.extension().is_some_and(|extension| extension == "csv"));
    files.sort();
    let mut fingerprint = Fingerprint::new();
    for file in files {
        fingerprint = fingerprint.with(&std::fs::read(file)?);
    }
    Ok(fingerprint.to_string())
}

/// The environments that occur often enough, ascending by key.
fn environments(reference: &Reference) -> Result<EnvironmentTable, Fault> {
    struct Seen {
        order: Order,
        words: String,
        classes: u16,
        shape: bool,
        molecules: u32,
        sum: f64,
        square: f64,
    }
    let mut seen: BTreeMap<_, Seen> = BTreeMap::new();
    let mut reader = EnvironmentReader::new();
    let mut smiles = groupsmith::chem::Reader::new();
    for molecule in &reference.molecules {
        let molecule = smiles.read(&molecule.constitution)?;
        let mut own: BTreeMap<_, f64> = BTreeMap::new();
        let mut clash = None;
        reader.each_of(&molecule, |environment, count| {
            let key = environment.key();
            *own.entry(key).or_default() += f64::from(count);
            let words = environment.to_string();
            let entry = seen.entry(key).or_insert_with(|| Seen {
                order: environment.order(),
                words: words.clone(),
                classes: classes_of(environment),
                shape: matches!(environment, Environment::Shape(_)),
                molecules: 0,
                sum: 0.0,
                square: 0.0,
            });
            if entry.words != words {
                clash = Some(format!("`{words}` and `{}` have one key", entry.words));
            }
        });
        if let Some(clash) = clash {
            return Err(clash.into());
        }
        for (key, count) in own {
            let entry = seen.get_mut(&key).expect("it was entered above");
            let root = count.abs().sqrt() * count.signum();
            entry.molecules += 1;
            entry.sum += root;
            entry.square += root * root;
        }
    }
    let total = reference.molecules.len() as f64;
    let atoms = Environment::Shape(ShapeFact::Atoms).key();
    seen.retain(|key, entry| entry.molecules >= LEAST_MOLECULES || *key == atoms);
    let counts_in_distance = |entry: &Seen| {
        entry.order != Order::Pair && entry.molecules >= LEAST_MOLECULES_FOR_DISTANCE
    };
    let coordinates = seen
        .values()
        .filter(|entry| counts_in_distance(entry))
        .count() as f64;
    let entries = seen
        .into_iter()
        .map(|(key, entry)| {
            let mean = entry.sum / total;
            let spread = (entry.square / total - mean * mean)
                .max(0.0)
                .sqrt()
                .max(0.1);
            let weight = 1.0 / (spread * coordinates.sqrt());
            EnvironmentEntry {
                key,
                order: entry.order,
                molecules: entry.molecules,
                distance_weight: if counts_in_distance(&entry) {
                    (weight * 1e5).round() as f32 / 1e5
                } else {
                    0.0
                },
                classes: if entry.shape { 0 } else { entry.classes },
                words: Arc::from(entry.words),
            }
        })
        .collect();
    Ok(EnvironmentTable::new(entries))
}

/// One quantity fitted at one level.
struct FittedModel {
    model: Model,
    outcome: Outcome,
}

impl Fit {
    fn known(&self, level: Level, molecule: usize) -> Option<Known> {
        let (boiling_points, volumes) = self.known.get(&level)?;
        Some(Known {
            boiling_point_k: *boiling_points.get(molecule)?,
            molar_volume_m3_per_mol: *volumes.get(molecule)?,
            molar_mass_kg_per_mol: self.reference.molecules[molecule].molar_mass_kg_per_mol,
        })
    }

    fn row(&self, quantity: Quantity, level: Level, molecule: usize) -> Vec<(u32, f64)> {
        let mut row = Vec::new();
        let known = self.known(level, molecule);
        self.molecules[molecule].each_term(&self.table, quantity, level, known, |term, value| {
            row.push((term, value));
        });
        row
    }

    fn fit(&mut self, quantity: Quantity, level: Level) -> Result<FittedModel, Fault> {
        let values = self.reference.values[quantity as usize].clone();
        let mut members = Vec::new();
        let mut targets = Vec::new();
        for &(molecule, value) in &values {
            let atoms = self.molecules[molecule].heavy_atoms();
            if let Some(sum) = quantity.opened(value, atoms, self.known(level, molecule)) {
                members.push(molecule);
                targets.push(sum);
            }
        }
        let rows: Rows = members
            .iter()
            .map(|&molecule| self.row(quantity, level, molecule))
            .collect();
        let squared = self.squared_distances(&members);
        let folds: Vec<usize> = members
            .iter()
            .map(|&molecule| self.reference.molecules[molecule].fold)
            .collect();
        let mut best: Option<(f64, Setting, Vec<f64>)> = None;
        let mut noise = Vec::new();
        for setting in settings(quantity, level) {
            let (covariance, _) = self.covariance(&rows, &squared, setting);
            let mut own_noise = vec![setting.noise; members.len()];
            let mut sums = validated(&covariance, &folds, &own_noise, &targets)?;
            if quantity == Quantity::VaporPressureSlope {
                for _ in 0..2 {
                    own_noise = doubted(setting.noise, &sums, &targets);
                    sums = validated(&covariance, &folds, &own_noise, &targets)?;
                }
            }
            let error = sums
                .iter()
                .zip(&targets)
                .map(|(sum, target)| (sum - target).abs());
            let error = error.sum::<f64>() / targets.len() as f64;
            if best.as_ref().is_none_or(|best| error < best.0) {
                best = Some((error, setting, sums));
                noise = own_noise;
            }
        }
        let (_, setting, sums) = best.expect("there is a setting for every quantity");

        let residuals: Vec<f64> = targets.iter().zip(&sums).map(|(t, s)| t - s).collect();
        // Residuals over their mean, those of a part left out.
        let errors_without = |out: Option<usize>| -> Vec<f64> {
            let kept = || (0..residuals.len()).filter(|&i| Some(folds[i]) != out);
            let sum: f64 = kept().map(|i| residuals[i].abs()).sum();
            let usual = sum / kept().count() as f64;
            let each: Vec<f64> = residuals.iter().map(|r| r.abs() / usual).collect();
            // values of one molecule have one error, their mean
            same_molecule(&members)
                .flat_map(|values| {
                    let own = &each[values];
                    let mean = own.iter().sum::<f64>() / own.len() as f64;
                    std::iter::repeat_n(mean, own.len())
                })
                .collect()
        };
        let errors = errors_without(None);

        // Standings as they are for molecules that the fit has not seen.
        let by_fold: Vec<Vec<u32>> = (0..FOLDS)
            .map(|fold| {
                self.occurrences(
                    members
                        .iter()
                        .zip(&folds)
                        .filter(|pair| *pair.1 != fold)
                        .map(|pair| *pair.0),
                )
            })
            .collect();
        let has_kinds: Vec<bool> = members
            .iter()
            .zip(&folds)
            .map(|(&molecule, &fold)| {
                let described = &self.molecules[molecule];
                !has_new_kind_of_atom(described, &by_fold[fold])
            })
            .collect();
        let inside: Vec<bool> = members
            .iter()
            .zip(&folds)
            .map(|(&molecule, &fold)| {
                let described = &self.molecules[molecule];
                !has_unknown_atoms(described, &by_fold[fold])
            })
            .collect();
        let firsts: Vec<usize> = same_molecule(&members).map(|values| values.start).collect();
        let standings = |out: Option<usize>| -> Vec<Standing> {
            let errors = errors_without(out);
            (0..members.len())
                .into_par_iter()
                .map(|i| {
                    let described = &self.molecules[members[i]];
                    let mut relatives = Relatives::unknown();
                    if level == Level::Structure {
                        relatives = Relatives::default();
                        let strange = |&j: &usize| folds[j] != folds[i] && Some(folds[j]) != out;
                        for j in firsts.iter().copied().filter(strange) {
                            relatives.add(f64::from(squared[i][j]), errors[j]);
                        }
                    }
                    let ground = Ground {
                        sum: sums[i],
                        rarity: rarity(described, &by_fold[folds[i]], level),
                        unknown_environments: unknown_environments(described, level),
                        unknown_atoms: !inside[i],
                        relatives: &relatives,
                    };
                    Standing::of(described, &ground)
                })
                .collect()
        };
        let (scale, half_widths) = scale::fit(&standings, &residuals, &folds);
        let by_molecule = members.iter().copied().zip(half_widths.iter().copied());
        self.half_widths
            .insert((level, quantity), by_molecule.collect());

        // The model itself rests on all.
        let (covariance, standard) = self.covariance(&rows, &squared, setting);
        let (mean, spread) = mean_and_spread(targets.iter().copied());
        let scaled: Vec<f64> = targets
            .iter()
            .map(|target| (target - mean) / spread)
            .collect();
        let all: Vec<usize> = (0..members.len()).collect();
        let parts = gaussian::solve(&covariance, &all, &noise, &scaled)?;
        let parts: Vec<f64> = parts.iter().map(|part| part * spread).collect();
        let (weights, constant) = standard.weights(&rows, &parts);
        let model = Model {
            quantity,
            level,
            intercept: mean + constant,
            weights,
            support: if setting.near > 0.0 {
                supporting(&members, &parts, &errors, setting.near)
            } else {
                Vec::new()
            },
            occurrences: self.occurrences(members.iter().copied()),
            scale,
            errors: Vec::new(),
        };
        if derived::constants().any(|kept| kept == quantity) {
            let partial =
                self.partial_models(quantity, level, &members, &targets, &folds, setting, &noise)?;
            if derived::is_base(quantity) {
                let all = self.estimate_all(quantity, level, &partial);
                let known = self.known.entry(level).or_default();
                match quantity {
                    Quantity::BoilingPoint => known.0 = all,
                    _ => known.1 = all,
                }
            }
            self.partial.insert((level, quantity), partial);
        }
        let outcome = Outcome::new(
            quantity,
            level,
            self,
            &members,
            &sums,
            &targets,
            &half_widths,
            &standings(None),
            &inside,
            &has_kinds,
            (setting.near, setting.noise),
        );
        Ok(FittedModel { model, outcome })
    }

    /// One model for each part, fitted without it.
    #[expect(
        clippy::too_many_arguments,
        reason = "everything a fit of one quantity rests on"
    )]
    fn partial_models(
        &self,
        quantity: Quantity,
        level: Level,
        members: &[usize],
        targets: &[f64],
        folds: &[usize],
        setting: Setting,
        noise: &[f64],
    ) -> Result<Vec<PartialModel>, Fault> {
        (0..FOLDS)
            .map(|fold| {
                let inside: Vec<usize> = (0..members.len()).filter(|&i| folds[i] != fold).collect();
                let of_fold: Vec<usize> = inside.iter().map(|&i| members[i]).collect();
                let rows: Rows = of_fold
                    .iter()
                    .map(|&molecule| self.row(quantity, level, molecule))
                    .collect();
                let squared = self.squared_distances(&of_fold);
                let (covariance, standard) = self.covariance(&rows, &squared, setting);
                let (mean, spread) = mean_and_spread(inside.iter().map(|&i| targets[i]));
                let scaled: Vec<f64> = inside
                    .iter()
                    .map(|&i| (targets[i] - mean) / spread)
                    .collect();
                let everyone: Vec<usize> = (0..inside.len()).collect();
                let noise: Vec<f64> = inside.iter().map(|&i| noise[i]).collect();
                let parts = gaussian::solve(&covariance, &everyone, &noise, &scaled)?;
                let parts: Vec<f64> = parts.iter().map(|part| part * spread).collect();
                let (weights, constant) = standard.weights(&rows, &parts);
                let near = setting.near;
                Ok(PartialModel {
                    occurrences: self.occurrences(of_fold.iter().copied()),
                    constant: mean + constant,
                    weights,
                    support: if near > 0.0 {
                        let parts = parts.iter().map(|part| near * part);
                        of_fold.iter().copied().zip(parts).collect()
                    } else {
                        Vec::new()
                    },
                })
            })
            .collect()
    }

    /// The value of a molecule by the model that was fitted without its part.
    fn without_own_part(
        &self,
        quantity: Quantity,
        level: Level,
        models: &[PartialModel],
        molecule: usize,
        known: Option<Known>,
    ) -> Option<f64> {
        let model = &models[self.reference.molecules[molecule].fold];
        let described = &self.molecules[molecule];
        let mut sum = model.constant;
        described.each_term(&self.table, quantity, level, known, |term, value| {
            sum += model.weights[term as usize] * value;
        });
        if !model.support.is_empty() {
            let mut squared = Vec::new();
            self.support
                .squared_distances_into(&self.table, described, &mut squared);
            for &(other, part) in &model.support {
                sum += part * similarity(f64::from(squared[other]));
            }
        }
        quantity.closed(sum, described.heavy_atoms(), known)
    }

    /// The quantity of every molecule of the reference, each from a fit without its part.
    fn estimate_all(&self, quantity: Quantity, level: Level, models: &[PartialModel]) -> Vec<f64> {
        (0..self.molecules.len())
            .into_par_iter()
            .map(|molecule| {
                let atoms = self.molecules[molecule].heavy_atoms();
                self.without_own_part(quantity, level, models, molecule, None)
                    // a sum without a value: as low as the closing function goes
                    .or_else(|| quantity.closed(0.1, atoms, None))
                    .expect("a tenth is inside every closing function")
            })
            .collect()
    }

    fn squared_distances(&self, members: &[usize]) -> Vec<Vec<f32>> {
        members
            .par_iter()
            .map(|&molecule| {
                let mut all = Vec::new();
                self.support.squared_distances_into(
                    &self.table,
                    &self.molecules[molecule],
                    &mut all,
                );
                members.iter().map(|&other| all[other]).collect()
            })
            .collect()
    }

    fn covariance(
        &self,
        rows: &Rows,
        squared: &[Vec<f32>],
        setting: Setting,
    ) -> (Vec<Vec<f64>>, Standard) {
        let mut covariance: Vec<Vec<f64>> = squared
            .par_iter()
            .map(|line| {
                line.iter()
                    .map(|&squared| match setting.near {
                        0.0 => 0.0,
                        near => near * similarity(f64::from(squared)),
                    })
                    .collect()
            })
            .collect();
        let inputs = Described::input_terms(&self.table);
        let standard = Standard::of(
            rows,
            inputs.1 as usize,
            inputs,
            setting.linear,
            setting.input,
        );
        standard.add_covariance(rows, &mut covariance);
        (covariance, standard)
    }

    fn occurrences(&self, members: impl Iterator<Item = usize>) -> Vec<u32> {
        let mut occurrences = vec![0; self.table.entries().len()];
        let members: BTreeSet<usize> = members.collect();
        for molecule in members {
            for &(position, _) in self.molecules[molecule].found() {
                if self.table.entries()[position as usize].order <= Order::Second {
                    occurrences[position as usize] += 1;
                }
            }
        }
        occurrences
    }
}

/// Places of the values of each molecule, those of one molecule together.
fn same_molecule(members: &[usize]) -> impl Iterator<Item = std::ops::Range<usize>> + '_ {
    let mut end = 0;
    members
        .chunk_by(|one, next| one == next)
        .map(move |values| {
            let start = end;
            end += values.len();
            start..end
        })
}

/// The molecules of a fit, ascending; the parts of one that has several values add up.
fn supporting(members: &[usize], parts: &[f64], errors: &[f64], near: f64) -> Vec<Supporting> {
    same_molecule(members)
        .map(|values| Supporting {
            molecule: members[values.start] as u32,
            error: errors[values.start] as f32,
            part: (parts[values].iter().sum::<f64>() * near) as f32,
        })
        .collect()
}

/// The sum of every molecule by a fit without its part.
fn validated(
    covariance: &[Vec<f64>],
    folds: &[usize],
    noise: &[f64],
    targets: &[f64],
) -> Result<Vec<f64>, Fault> {
    let mut sums = vec![0.0; targets.len()];
    for fold in 0..FOLDS {
        let inside: Vec<usize> = (0..targets.len()).filter(|&i| folds[i] != fold).collect();
        let (mean, spread) = mean_and_spread(inside.iter().map(|&i| targets[i]));
        let scaled: Vec<f64> = inside
            .iter()
            .map(|&i| (targets[i] - mean) / spread)
            .collect();
        let parts = gaussian::solve(covariance, &inside, noise, &scaled)?;
        for i in (0..targets.len()).filter(|&i| folds[i] == fold) {
            let sum: f64 = inside
                .iter()
                .zip(&parts)
                .map(|(&j, part)| covariance[i][j] * part)
                .sum();
            sums[i] = mean + spread * sum;
        }
    }
    Ok(sums)
}

/// The noise of each point where some are wrong: what is more than 2.5 usual deviations off in
/// cross-validation is taken for as noisy as it looks. Nothing is dropped.
fn doubted(noise: f64, sums: &[f64], targets: &[f64]) -> Vec<f64> {
    let off: Vec<f64> = sums
        .iter()
        .zip(targets)
        .map(|(sum, target)| (sum - target).abs())
        .collect();
    let mut sorted = off.clone();
    sorted.sort_by(f64::total_cmp);
    // the median of a normal distribution is its deviation over 1.48
    let usual = 2.5 * 1.48 * sorted[sorted.len() / 2];
    off.iter()
        .map(|off| noise * (off / usual).max(1.0).powi(2))
        .collect()
}

fn mean_and_spread(values: impl Iterator<Item = f64> + Clone) -> (f64, f64) {
    let count = values.clone().count().max(1) as f64;
    let mean = values.clone().sum::<f64>() / count;
    let square = values.map(|value| (value - mean).powi(2)).sum::<f64>() / count;
    (mean, square.sqrt().max(1e-12))
}
