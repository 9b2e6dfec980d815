//! From the brief as written to the checked one: meanings, units, ranges.

use std::path::PathBuf;
use std::sync::Arc;

use super::catalog::{Figure, FigureCatalog, Need};
use super::error::{Cause, Fault, Faults};
use super::fractions::checked_fractions;
use super::place::{Located, Place};
use super::raw::{
    self, Field, RawAssembly, RawBrief, RawData, RawMixture, RawPool, RawQuantity, RawRange,
    RawRanking, RawReference, RawSolventToFeed, RawStructure, RawTarget,
};
use super::structure::{CountRange, GroupLimit, PatternLimit, Structure};
use super::target::{Direction, Target, Want};
use super::types::{
    Assembly, Basis, Brief, DEFAULT_KEEP_BEST, Job, LARGEST_KEEP_BEST, Mixture, Pool, RankBy,
    Ranking, SolventToFeed,
};
use crate::chem::Element;
use crate::quantity::Dimension;
use crate::quantity::unit::{self, UnitError, nearest};

/// Default tolerance of a temperature to be close to, in K.
const CLOSE_TEMPERATURE_K: f64 = 20.0;

/// Default tolerance of anything else to be close to, as a share of the value.
const CLOSE_SHARE: f64 = 0.2;

impl Brief {
    /// Reads the text of a brief; `file` is its name in messages.
    ///
    /// As [`read_for`](Self::read_for) with [`Job::Check`].
    ///
    /// # Errors
    ///
    /// Every fault of the text.
    pub fn read(text: &str, file: &str, catalog: &FigureCatalog<'_>) -> Result<Self, Faults> {
        Self::read_for(text, file, catalog, Job::Check)
    }

    /// Reads the text of a brief for a job, which decides what has to be in it.
    ///
    /// A byte-order mark and CRLF line ends are taken as they come. A text that
    /// is not TOML has one fault, the first the TOML reader met; in any other
    /// text every fault is found in one go. A field that is faulty in itself
    /// is not also reported as missing.
    ///
    /// # Errors
    ///
    /// Every fault, in the order of their places.
    pub fn read_for(
        text: &str,
        file: &str,
        catalog: &FigureCatalog<'_>,
        job: Job,
    ) -> Result<Self, Faults> {
        let toml = text.strip_prefix('\u{feff}').unwrap_or(text);
        let (raw, faults) = raw::read(toml);
        let is_toml = !faults
            .iter()
            .any(|(_, cause)| matches!(cause, Cause::Syntax { .. }));
        let mut check = Check { catalog, faults };
        let brief = is_toml.then(|| check.brief(raw, text, file, job));
        match brief {
            Some(brief) if check.faults.is_empty() => Ok(brief),
            _ => {
                let mut faults = check.faults;
                faults.sort_by_key(|(place, _)| *place);
                let file: Arc<str> = file.into();
                Err(Faults(
                    faults
                        .into_iter()
                        .map(|(place, cause)| Fault {
                            file: file.clone(),
                            place,
                            cause,
                        })
                        .collect(),
                ))
            }
        }
    }
}

struct Check<'a> {
    catalog: &'a FigureCatalog<'a>,
    faults: Vec<(Place, Cause)>,
}

/// What the brief gives, sound or not, for figures that need it.
#[derive(Clone, Debug, Default)]
struct Given {
    mixture: bool,
    components: Option<Vec<String>>,
    two_components: bool,
    fractions: bool,
    temperature: bool,
    pressure: bool,
    solvent_to_feed: bool,
}

impl Given {
    fn of(raw: &RawBrief) -> Self {
        let Some(mixture) = &raw.mixture else {
            // A `mixture` that is no table has its fault; nothing in it is missing.
            let faulty = raw.has_mixture;
            return Self {
                mixture: faulty,
                components: None,
                two_components: faulty,
                fractions: faulty,
                temperature: faulty,
                pressure: faulty,
                solvent_to_feed: faulty,
            };
        };
        let components = match &mixture.components {
            Field::Given(list) => Some(
                list.value
                    .iter()
                    .map(|component| component.value.clone())
                    .collect::<Vec<_>>(),
            ),
            Field::Absent | Field::Faulty => None,
        };
        Self {
            mixture: true,
            two_components: components.as_ref().is_none_or(|list| list.len() >= 2),
            components,
            fractions: !mixture.fractions.is_absent(),
            temperature: !mixture.temperature.is_absent(),
            pressure: !mixture.pressure.is_absent(),
            solvent_to_feed: mixture.has_solvent_to_feed,
        }
    }
}

impl Check<'_> {
    fn fault(&mut self, place: Place, cause: Cause) {
        self.faults.push((place, cause));
    }

    fn brief(&mut self, raw: RawBrief, text: &str, file: &str, job: Job) -> Brief {
        let given = Given::of(&raw);
        self.parts_for(job, &raw);
        Brief {
            file: file.into(),
            folder: PathBuf::new(),
            text: text.into(),
            title: raw.title.given(),
            purpose: raw.purpose.given(),
            mixture: raw
                .mixture
                .and_then(|mixture| self.mixture(mixture, job == Job::Mixture)),
            data_folder: raw.data.and_then(|data| self.data_folder(data)),
            pool: raw.pool.and_then(|pool| self.pool(pool)),
            assembly: raw.assembly.map(|assembly| self.assembly(assembly)),
            structure: self.structure(raw.structure),
            targets: raw
                .targets
                .into_iter()
                .filter_map(|target| self.target(target, &given))
                .collect(),
            keep_best: self.keep_best(raw.keep_best),
            ranking: raw
                .ranking
                .map_or_else(Ranking::default, |ranking| self.ranking(ranking)),
        }
    }

    fn parts_for(&mut self, job: Job, raw: &RawBrief) {
        let mut missing = |key, example| {
            let section = "the brief".to_owned();
            let cause = Cause::Missing {
                section,
                key,
                example,
            };
            self.faults.push((Place::START, cause));
        };
        let has_target = raw.has_targets;
        let target = "[[target]] with figure = \"boiling_point\" and at_least = \"390 K\"";
        let mixture = "[mixture] with components = [\"ethyl acetate\", \"CCO\"]";
        match job {
            Job::Screen => {
                if !raw.has_pool {
                    missing("[pool]", "[pool] with file = \"solvents.csv\"");
                }
                if !has_target {
                    missing("[[target]]", target);
                }
            }
            Job::Assemble if !has_target => missing("[[target]]", target),
            Job::Mixture if !raw.has_mixture => missing("[mixture]", mixture),
            Job::Check if !has_target && !raw.has_mixture => missing("[[target]]", target),
            Job::Assemble | Job::Mixture | Job::Check => {}
        }
    }

    fn mixture(&mut self, raw: RawMixture, alone: bool) -> Option<Mixture> {
        let section = || "`[mixture]`".to_owned();
        if raw.components.is_absent() {
            self.fault(
                raw.place,
                Cause::Missing {
                    section: section(),
                    key: "components",
                    example: "components = [\"ethyl acetate\", \"CCO\"]",
                },
            );
        }
        if alone && raw.temperature.is_absent() && raw.pressure.is_absent() {
            self.fault(
                raw.place,
                Cause::Missing {
                    section: section(),
                    key: "temperature",
                    example: "temperature = \"345 K\"  or  pressure = \"101.325 kPa\"",
                },
            );
        }
        let components = raw.components.given();
        if let Some(list) = &components {
            if list.value.is_empty() {
                self.fault(
                    list.place,
                    Cause::Empty {
                        field: "mixture.components".into(),
                    },
                );
            }
            self.refuse_twice("mixture.components", &list.value);
        }
        let names: Option<Vec<&str>> = components.as_ref().map(|list| {
            list.value
                .iter()
                .map(|component| component.value.as_str())
                .collect()
        });

        let keys = match (raw.keys.given(), &names, &components) {
            (Some(keys), Some(names), _) => self.keys(keys, names),
            (None, Some(names), Some(components)) if names.len() >= 2 => {
                Some(Located::new([0, 1], components.place))
            }
            _ => None,
        };
        let fractions = match (raw.fractions.given(), &names) {
            (Some(fractions), Some(names)) => {
                match checked_fractions(&fractions.value, names.len()) {
                    Ok(sound) => Some(Located::new(sound, fractions.place)),
                    Err(error) => {
                        self.fault(fractions.place, Cause::Fractions { error });
                        None
                    }
                }
            }
            _ => None,
        };
        let basis = raw
            .basis
            .given()
            .and_then(|basis| {
                self.word(
                    "mixture.basis",
                    &basis,
                    &["mole", "mass", "volume"],
                    Basis::from_id,
                )
            })
            .unwrap_or_default();
        let mut models = Vec::new();
        if let Some(written) = raw.model.given() {
            if written.value.is_empty() {
                self.fault(
                    written.place,
                    Cause::Empty {
                        field: "mixture.model".into(),
                    },
                );
            }
            self.refuse_twice("mixture.model", &written.value);
            models.extend(written.value.into_iter().filter_map(|id| self.model(id)));
        }
        let temperature_k = self.positive(
            "mixture.temperature",
            raw.temperature,
            Dimension::Temperature,
        );
        let pressure_pa = self.positive("mixture.pressure", raw.pressure, Dimension::Pressure);
        let solvent_to_feed = raw
            .solvent_to_feed
            .and_then(|ratio| self.solvent_to_feed(ratio));
        Some(Mixture {
            components: components?.value,
            keys,
            fractions,
            basis,
            temperature_k,
            pressure_pa,
            models,
            solvent_to_feed,
            estimates_for_keys: raw
                .estimates_for_keys
                .given()
                .is_some_and(|allowed| allowed.value),
        })
    }

    fn keys(
        &mut self,
        keys: Located<Vec<Located<RawReference>>>,
        components: &[&str],
    ) -> Option<Located<[usize; 2]>> {
        let positions: Vec<Option<usize>> = keys
            .value
            .iter()
            .map(|key| self.component("mixture.keys", key, components))
            .collect();
        match positions[..] {
            [Some(first), Some(second)] if first == second => {
                self.fault(
                    keys.value[1].place,
                    Cause::Twice {
                        field: "mixture.keys".into(),
                        value: components[first].to_owned(),
                    },
                );
                None
            }
            [Some(first), Some(second)] => Some(Located::new([first, second], keys.place)),
            [_, _] => None,
            _ => {
                self.fault(
                    keys.place,
                    Cause::Range {
                        field: "mixture.keys".into(),
                        value: format!("a list of {}", positions.len()),
                        wanted: "but has to hold two components",
                    },
                );
                None
            }
        }
    }

    fn component(
        &mut self,
        field: &str,
        reference: &Located<RawReference>,
        components: &[&str],
    ) -> Option<usize> {
        let found = match &reference.value {
            RawReference::Name(name) => components
                .iter()
                .position(|component| component.trim() == name.trim()),
            RawReference::Position(position) => usize::try_from(*position)
                .ok()
                .and_then(|position| position.checked_sub(1))
                .filter(|&position| position < components.len()),
        };
        if found.is_none() {
            self.fault(
                reference.place,
                Cause::UnknownComponent {
                    field: field.to_owned(),
                    name: match &reference.value {
                        RawReference::Name(name) => name.clone(),
                        RawReference::Position(position) => position.to_string(),
                    },
                    components: components.iter().map(|&name| name.to_owned()).collect(),
                },
            );
        }
        found
    }

    fn model(&mut self, id: Located<String>) -> Option<Located<&'static str>> {
        match self.catalog.model(&id.value) {
            Some(model) if model.built_in => Some(Located::new(model.id, id.place)),
            Some(model) => {
                let cause = Cause::ModelNotBuiltIn {
                    model: model.id,
                    built_in: self.catalog.built_in_models().collect(),
                };
                self.fault(id.place, cause);
                None
            }
            None => {
                let nearest = nearest(&id.value, self.catalog.models.iter().map(|model| model.id));
                let cause = Cause::UnknownModel {
                    model: id.value,
                    nearest,
                    built_in: self.catalog.built_in_models().collect(),
                };
                self.fault(id.place, cause);
                None
            }
        }
    }

    fn solvent_to_feed(&mut self, raw: RawSolventToFeed) -> Option<Located<SolventToFeed>> {
        let field = "mixture.solvent_to_feed";
        if raw.ratio.is_absent() {
            self.fault(
                raw.place,
                Cause::Missing {
                    section: format!("`{field}`"),
                    key: "ratio",
                    example: "solvent_to_feed = { ratio = 2.0, basis = \"mole\" }",
                },
            );
        }
        let basis = match raw.basis {
            Field::Absent => Some(Basis::Mole),
            Field::Faulty => None,
            Field::Given(basis) => self.word(
                "mixture.solvent_to_feed.basis",
                &basis,
                &["mole", "mass"],
                |word| Basis::from_id(word).filter(|&basis| basis != Basis::Volume),
            ),
        };
        let ratio = raw.ratio.given()?;
        if ratio.value <= 0.0 {
            self.above_zero(field, &ratio);
            return None;
        }
        Some(Located::new(
            SolventToFeed {
                ratio: ratio.value,
                basis: basis?,
            },
            raw.place,
        ))
    }

    fn data_folder(&mut self, raw: RawData) -> Option<Located<String>> {
        if raw.folder.is_absent() {
            self.fault(
                raw.place,
                Cause::Missing {
                    section: "`[data]`".into(),
                    key: "folder",
                    example: "folder = \"lab\"",
                },
            );
        }
        raw.folder.given()
    }

    fn pool(&mut self, raw: RawPool) -> Option<Pool> {
        if raw.file.is_absent() {
            self.fault(
                raw.place,
                Cause::Missing {
                    section: "`[pool]`".into(),
                    key: "file",
                    example: "file = \"solvents.csv\"",
                },
            );
        }
        Some(Pool {
            file: raw.file.given()?,
            name_column: raw.name_column.given(),
            smiles_column: raw.smiles_column.given(),
        })
    }

    fn assembly(&mut self, raw: RawAssembly) -> Located<Assembly> {
        let (least_pieces, most_pieces) = (raw.least.given(), raw.most.given());
        if let (Some(least), Some(most)) = (least_pieces, most_pieces)
            && least.value > most.value
        {
            self.fault(
                least.place,
                Cause::Reversed {
                    field: "assembly.count".into(),
                    at_least: least.value.to_string(),
                    at_most: most.value.to_string(),
                },
            );
        }
        let pieces = raw
            .pieces
            .given()
            .map(|pieces| pieces.value)
            .unwrap_or_default();
        self.refuse_twice("assembly.pieces", &pieces);
        let heavy_atoms = self.sized("assembly.heavy_atoms", raw.heavy_atoms);
        let most_molar_mass_kg_per_mol = self.quantity(
            "assembly.molar_mass.at_most",
            raw.molar_mass,
            Dimension::MolarMass,
        );
        Located::new(
            Assembly {
                pieces,
                least_pieces,
                most_pieces,
                heavy_atoms,
                most_molar_mass_kg_per_mol,
                structures: raw.structures.given(),
                allow: raw.allow.given().map(|list| list.value).unwrap_or_default(),
                limits: raw.limits,
            },
            raw.place,
        )
    }

    fn structure(&mut self, raw: RawStructure) -> Structure {
        let allowed = raw.allowed.given().map(|list| {
            let place = list.place;
            let elements = self.elements("structure.allowed_elements", list.value);
            Located::new(
                elements.into_iter().map(|element| element.value).collect(),
                place,
            )
        });
        let forbidden = raw
            .forbidden
            .given()
            .map(|list| self.elements("structure.forbidden_elements", list.value))
            .unwrap_or_default();
        let heavy_atoms = self.sized("structure.heavy_atoms", raw.heavy_atoms);
        let rings = self.sized("structure.rings", raw.rings);
        let molar_mass_kg_per_mol = raw.molar_mass.and_then(|range| self.molar_mass(range));
        let mut atoms = Vec::new();
        for (symbol, range) in raw.atoms {
            let field = format!("structure.atoms.{}", symbol.value);
            let count = self.count_range(&field, range);
            let element = self.elements("structure.atoms", vec![symbol]).pop();
            if let (Some(element), Some(count)) = (element, count) {
                atoms.push((element, count.value));
            }
        }
        let mut groups = Vec::new();
        for (position, group) in raw.groups.into_iter().enumerate() {
            let name = format!("`[[structure.group]]` number {}", position + 1);
            let place = group.count.place;
            self.require(&group.set, place, &name, "set", "set = \"unifac\"");
            self.require(&group.number, place, &name, "number", "number = 14");
            let count = self.count_range(&name, group.count);
            let number =
                group
                    .number
                    .given()
                    .and_then(|number| match u16::try_from(number.value) {
                        Ok(value) => Some(Located::new(value, number.place)),
                        Err(_) => {
                            let cause = Cause::Range {
                                field: format!("structure.group {}.number", position + 1),
                                value: number.value.to_string(),
                                wanted: "but has to be the published number of a group",
                            };
                            self.fault(number.place, cause);
                            None
                        }
                    });
            if let (Some(set), Some(number), Some(count)) = (group.set.given(), number, count) {
                groups.push(GroupLimit {
                    set,
                    number,
                    count: count.value,
                    place,
                });
            }
        }
        let mut patterns = Vec::new();
        for (position, pattern) in raw.patterns.into_iter().enumerate() {
            let name = format!("`[[structure.pattern]]` number {}", position + 1);
            let place = pattern.count.place;
            let example = "pattern = \"[O][O]\"";
            self.require(&pattern.pattern, place, &name, "pattern", example);
            let count = self.count_range(&name, pattern.count);
            if let (Some(text), Some(count)) = (pattern.pattern.given(), count) {
                patterns.push(PatternLimit {
                    name: pattern.name.given().map(|name| name.value),
                    pattern: text,
                    count: count.value,
                    place,
                });
            }
        }
        Structure {
            allowed,
            forbidden,
            heavy_atoms,
            rings,
            molar_mass_kg_per_mol,
            atoms,
            groups,
            patterns,
        }
    }

    fn elements(&mut self, field: &str, symbols: Vec<Located<String>>) -> Vec<Located<Element>> {
        symbols
            .into_iter()
            .filter_map(|symbol| {
                let found = Element::from_symbol(symbol.value.trim());
                if found.is_none() {
                    let cause = Cause::UnknownElement {
                        field: field.to_owned(),
                        symbol: symbol.value.clone(),
                    };
                    self.fault(symbol.place, cause);
                }
                found.map(|element| Located::new(element, symbol.place))
            })
            .collect()
    }

    fn sized(&mut self, field: &str, range: Option<RawRange<u32>>) -> Option<Located<CountRange>> {
        self.count_range(field, range?)
    }

    fn count_range(&mut self, field: &str, range: RawRange<u32>) -> Option<Located<CountRange>> {
        self.refuse_limitless(field, &range);
        let faulty = |bound: &Field<u32>| matches!(bound, Field::Faulty);
        if faulty(&range.at_least) || faulty(&range.at_most) {
            return None;
        }
        let (least, most) = (range.at_least.given(), range.at_most.given());
        if let (Some(least), Some(most)) = (least, most)
            && least.value > most.value
        {
            self.fault(
                least.place,
                Cause::Reversed {
                    field: field.trim_matches('`').to_owned(),
                    at_least: least.value.to_string(),
                    at_most: most.value.to_string(),
                },
            );
            return None;
        }
        Some(Located::new(
            CountRange {
                at_least: least.map(|bound| bound.value),
                at_most: most.map(|bound| bound.value),
            },
            range.place,
        ))
    }

    fn molar_mass(
        &mut self,
        range: RawRange<RawQuantity>,
    ) -> Option<Located<(Option<f64>, Option<f64>)>> {
        let field = "structure.molar_mass";
        self.refuse_limitless(field, &range);
        let place = range.place;
        let bounds = self.bounds(field, range.at_least, range.at_most, Dimension::MolarMass);
        bounds.map(|bounds| Located::new(bounds, place))
    }

    fn refuse_limitless<T>(&mut self, field: &str, range: &RawRange<T>) {
        if range.at_least.is_absent() && range.at_most.is_absent() {
            let section = match field.starts_with('`') {
                true => field.to_owned(),
                false => format!("`{field}`"),
            };
            self.fault(range.place, Cause::NoLimit { section });
        }
    }

    /// Two limits in SI, neither above the other; `None` after a fault.
    fn bounds(
        &mut self,
        name: &str,
        at_least: Field<RawQuantity>,
        at_most: Field<RawQuantity>,
        dimension: Dimension,
    ) -> Option<(Option<f64>, Option<f64>)> {
        let words = |field: &Field<RawQuantity>| match field {
            Field::Given(quantity) => quantity.value.as_written(),
            Field::Absent | Field::Faulty => String::new(),
        };
        let as_written = (words(&at_least), words(&at_most));
        let faulty = |given: bool, read: &Option<Located<f64>>| given && read.is_none();
        let (gave_least, gave_most) = (!at_least.is_absent(), !at_most.is_absent());
        let least = self.quantity(&format!("{name}.at_least"), at_least, dimension);
        let most = self.quantity(&format!("{name}.at_most"), at_most, dimension);
        if faulty(gave_least, &least) || faulty(gave_most, &most) {
            return None;
        }
        if let (Some(least), Some(most)) = (least, most)
            && least.value > most.value
        {
            self.fault(
                least.place,
                Cause::Reversed {
                    field: name.to_owned(),
                    at_least: as_written.0,
                    at_most: as_written.1,
                },
            );
            return None;
        }
        Some((
            least.map(|bound| bound.value),
            most.map(|bound| bound.value),
        ))
    }

    fn keep_best(&mut self, raw: Field<u32>) -> usize {
        let Some(best) = raw.given() else {
            return DEFAULT_KEEP_BEST;
        };
        let count = best.value as usize;
        if !(1..=LARGEST_KEEP_BEST).contains(&count) {
            self.fault(
                best.place,
                Cause::Range {
                    field: "keep.best".into(),
                    value: count.to_string(),
                    wanted: "but has to be from 1 to 1000000",
                },
            );
        }
        count
    }

    fn ranking(&mut self, raw: RawRanking) -> Ranking {
        let by_place = raw.by.place();
        let by = raw.by.given().and_then(|by| {
            self.word(
                "ranking.by",
                &by,
                &["expected-score", "probability", "cautious"],
                RankBy::from_id,
            )
        });
        let confidence = raw.confidence.given();
        if let Some(confidence) = &confidence
            && !(0.0..1.0).contains(&confidence.value)
        {
            self.fault(
                confidence.place,
                Cause::Range {
                    field: "ranking.confidence".into(),
                    value: confidence.value.to_string(),
                    wanted: "but has to be from 0 to less than 1",
                },
            );
        }
        let ranking = Ranking {
            by: by.unwrap_or_default(),
            confidence: confidence.map_or(Ranking::DEFAULT_CONFIDENCE, |given| given.value),
        };
        // Without intervals every rule is the first one.
        if let Some(place) = by_place
            && ranking.by != RankBy::ExpectedScore
            && !ranking.uses_intervals()
        {
            self.fault(
                place,
                Cause::Stray {
                    field: "ranking.by".into(),
                    needed: "confidence > 0",
                },
            );
        }
        ranking
    }

    fn target(&mut self, raw: RawTarget, given: &Given) -> Option<Target> {
        let figure = match &raw.figure {
            Field::Given(id) => self.figure(id),
            Field::Faulty => None,
            Field::Absent => {
                self.fault(
                    raw.place,
                    Cause::Missing {
                        section: raw.name.clone(),
                        key: "figure",
                        example: "figure = \"boiling_point\"",
                    },
                );
                None
            }
        };
        let weight = raw.weight.clone().given();
        if let Some(weight) = &weight
            && weight.value <= 0.0
        {
            self.above_zero(&format!("{}.weight", raw.name), weight);
        }
        // Without a figure there is no unit to judge the numbers by.
        let figure = figure?;
        self.needs(&raw, figure.value, given);
        let component = match (&raw.component, &given.components) {
            (Field::Given(reference), Some(components))
                if figure.value.needs.component != Need::Refused =>
            {
                let names: Vec<&str> = components.iter().map(String::as_str).collect();
                let field = format!("{}.component", raw.name);
                self.component(&field, reference, &names)
                    .map(|position| Located::new(position, reference.place))
            }
            _ => None,
        };
        let temperature_k = self.positive(
            &format!("{}.temperature", raw.name),
            raw.temperature.clone(),
            Dimension::Temperature,
        );
        let (place, must_as_given) = (raw.place, raw.must.clone().given());
        let dimension = figure.value.dimension;
        let want = self.want(raw, dimension)?;
        let must = must_as_given.map_or(want.is_limit(), |must| must.value);
        Some(Target {
            figure: Located::new(figure.value.id, figure.place),
            dimension,
            component,
            temperature_k,
            want,
            must,
            weight: weight.map_or(1.0, |weight| weight.value),
            counts: !(must && want.is_limit()),
            place,
        })
    }

    fn figure(&mut self, id: &Located<String>) -> Option<Located<Figure>> {
        let found = self.catalog.figure(id.value.trim()).copied();
        if found.is_none() {
            let cause = Cause::UnknownFigure {
                figure: id.value.clone(),
                nearest: self.catalog.nearest_figure(&id.value),
                known: self
                    .catalog
                    .figures
                    .iter()
                    .map(|figure| figure.id)
                    .collect(),
            };
            self.fault(id.place, cause);
        }
        found.map(|figure| Located::new(figure, id.place))
    }

    /// What the figure is computed from has to be in the brief.
    fn needs(&mut self, raw: &RawTarget, figure: Figure, given: &Given) {
        let needs = figure.needs;
        let place = raw.figure.place().unwrap_or(raw.place);
        let mut lacks = |needed, remedy| {
            let figure = figure.id;
            let cause = Cause::Needs {
                figure,
                needed,
                remedy,
            };
            self.faults.push((place, cause));
        };
        let needs_mixture = needs.mixture || needs.keys || needs.fractions;
        if needs_mixture && !given.mixture {
            lacks(
                "a mixture",
                "add  [mixture] with components = [\"ethyl acetate\", \"CCO\"]",
            );
        } else {
            if needs.keys && !given.two_components {
                lacks(
                    "two key components",
                    "name at least two components in `[mixture]`",
                );
            }
            if needs.fractions && !given.fractions {
                lacks(
                    "fractions of the components",
                    "add  fractions = [0.54, 0.46]  to `[mixture]`",
                );
            }
            let own_temperature =
                needs.at_temperature != Need::Refused && !raw.temperature.is_absent();
            if needs.state && !(given.temperature || given.pressure || own_temperature) {
                lacks(
                    "a temperature or a pressure",
                    "add  temperature = \"345 K\"  or  pressure = \"101.325 kPa\"  to `[mixture]`",
                );
            }
            if needs.pressure && !given.pressure {
                lacks(
                    "a pressure",
                    "add  pressure = \"101.325 kPa\"  to `[mixture]`",
                );
            }
            if needs.solvent_to_feed && !given.solvent_to_feed {
                lacks(
                    "the amount of solvent",
                    "add  solvent_to_feed = { ratio = 2.0, basis = \"mole\" }  to `[mixture]`",
                );
            }
        }
        if needs.component == Need::Required && raw.component.is_absent() {
            lacks(
                "a component",
                "add  component = 1  (or the name of a component) to the target",
            );
        }
        if needs.at_temperature == Need::Required && raw.temperature.is_absent() {
            lacks(
                "a temperature",
                "add  temperature = \"298.15 K\"  to the target",
            );
        }
        for (need, taken_place, field, reason) in [
            (
                needs.component,
                raw.component.place(),
                "component",
                "it is a figure of the candidate or of the whole mixture; leave `component` out",
            ),
            (
                needs.at_temperature,
                raw.temperature.place(),
                "temperature",
                "its temperature is fixed by what it is, or by `[mixture]`; leave `temperature` out",
            ),
        ] {
            if let (Need::Refused, Some(place)) = (need, taken_place) {
                let figure = figure.id;
                let cause = Cause::NotTaken {
                    figure,
                    field,
                    reason,
                };
                self.fault(place, cause);
            }
        }
    }

    fn want(&mut self, raw: RawTarget, dimension: Dimension) -> Option<Want> {
        let name = raw.name.clone();
        let field = |key: &str| format!("{name}.{key}");
        let limit = match (raw.at_least.is_absent(), raw.at_most.is_absent()) {
            (false, _) => Some("at_least"),
            (true, false) => Some("at_most"),
            (true, true) => None,
        };
        let close = (!raw.close_to.is_absent()).then_some("close_to");
        let prefer = (!raw.prefer.is_absent()).then_some("prefer");
        let kinds: Vec<&'static str> = [limit, close, prefer].into_iter().flatten().collect();
        let must_limit = limit.is_some() && !matches!(&raw.must, Field::Given(must) if !must.value);

        let mut strays = Vec::new();
        if prefer.is_none() {
            strays.extend(raw.worst.place().map(|place| (place, "worst", "prefer")));
            strays.extend(raw.best.place().map(|place| (place, "best", "prefer")));
        }
        if let Some(place) = raw.tolerance.place() {
            if limit.is_none() && close.is_none() {
                strays.push((place, "tolerance", "close_to"));
            } else if must_limit && close.is_none() && !matches!(raw.must, Field::Faulty) {
                strays.push((place, "tolerance", "must = false"));
            }
        }
        for (place, key, needed) in strays {
            let field = field(key);
            self.fault(place, Cause::Stray { field, needed });
        }
        match kinds[..] {
            [] => {
                self.fault(raw.place, Cause::NothingWanted { figure: name });
                return None;
            }
            [_] => {}
            [first, second, ..] => {
                let cause = Cause::TwoWants {
                    figure: name,
                    first,
                    second,
                };
                self.fault(raw.place, cause);
                return None;
            }
        }
        let gave_tolerance = !raw.tolerance.is_absent();
        let tolerance = self.tolerance(&field("tolerance"), raw.tolerance, dimension);
        if limit.is_some() {
            let bounds = self.bounds(&name, raw.at_least, raw.at_most, dimension)?;
            if gave_tolerance && tolerance.is_none() {
                return None;
            }
            let tolerance = tolerance.unwrap_or(0.0);
            return match bounds {
                (Some(low), Some(high)) => Some(Want::Between {
                    low,
                    high,
                    tolerance,
                }),
                (Some(limit), None) => Some(Want::AtLeast { limit, tolerance }),
                (None, Some(limit)) => Some(Want::AtMost { limit, tolerance }),
                (None, None) => None,
            };
        }
        if close.is_some() {
            let value = self.quantity(&field("close_to"), raw.close_to, dimension)?;
            if gave_tolerance {
                return tolerance.map(|tolerance| Want::CloseTo {
                    value: value.value,
                    tolerance,
                });
            }
            let tolerance = match dimension {
                Dimension::Temperature => CLOSE_TEMPERATURE_K,
                _ => CLOSE_SHARE * value.value.abs(),
            };
            if tolerance == 0.0 {
                self.fault(
                    value.place,
                    Cause::Missing {
                        section: format!("the target on `{name}`"),
                        key: "tolerance",
                        example: "tolerance = 0.5",
                    },
                );
                return None;
            }
            return Some(Want::CloseTo {
                value: value.value,
                tolerance,
            });
        }
        let section = format!("the target on `{name}`");
        let (place, worst, best) = (raw.place, raw.worst, raw.best);
        self.require(&worst, place, &section, "worst", "worst = 1.0");
        self.require(&best, place, &section, "best", "best = 4.0");
        let words = |end: &Field<RawQuantity>| match end {
            Field::Given(quantity) => quantity.value.as_written(),
            Field::Absent | Field::Faulty => String::new(),
        };
        let as_written = (words(&worst), words(&best));
        let worst = self.quantity(&field("worst"), worst, dimension);
        let best = self.quantity(&field("best"), best, dimension);
        let prefer = raw.prefer.given()?;
        let direction = self.word(
            &field("prefer"),
            &prefer,
            &["high", "low"],
            |word| match word {
                "high" => Some(Direction::High),
                "low" => Some(Direction::Low),
                _ => None,
            },
        );
        let (direction, worst, best) = (direction?, worst?, best?);
        let fits = match direction {
            Direction::High => best.value > worst.value,
            Direction::Low => best.value < worst.value,
        };
        if !fits {
            self.fault(
                worst.place,
                Cause::Scale {
                    figure: name,
                    prefer: match direction {
                        Direction::High => "high",
                        Direction::Low => "low",
                    },
                    worst: as_written.0,
                    best: as_written.1,
                },
            );
            return None;
        }
        Some(Want::Prefer {
            direction,
            worst: worst.value,
            best: best.value,
        })
    }

    // Small judgements.

    fn require<T>(
        &mut self,
        field: &Field<T>,
        place: Place,
        section: &str,
        key: &'static str,
        example: &'static str,
    ) {
        if field.is_absent() {
            let section = section.to_owned();
            let cause = Cause::Missing {
                section,
                key,
                example,
            };
            self.fault(place, cause);
        }
    }

    fn quantity(
        &mut self,
        field: &str,
        raw: Field<RawQuantity>,
        dimension: Dimension,
    ) -> Option<Located<f64>> {
        let quantity = raw.given()?;
        let read = match &quantity.value {
            RawQuantity::Text(text) => unit::parse(text, dimension),
            RawQuantity::Number(number) => bare(*number, dimension),
        };
        self.read(field, quantity.place, read)
    }

    fn tolerance(
        &mut self,
        field: &str,
        raw: Field<RawQuantity>,
        dimension: Dimension,
    ) -> Option<f64> {
        let quantity = raw.given()?;
        let read = match &quantity.value {
            RawQuantity::Text(text) => unit::parse_difference(text, dimension),
            RawQuantity::Number(number) => bare(*number, dimension),
        };
        let width = self.read(field, quantity.place, read)?;
        if width.value <= 0.0 {
            self.fault(
                width.place,
                Cause::Range {
                    field: field.to_owned(),
                    value: quantity.value.as_written(),
                    wanted: "but has to be above 0",
                },
            );
            return None;
        }
        Some(width.value)
    }

    fn read(
        &mut self,
        field: &str,
        place: Place,
        read: Result<f64, UnitError>,
    ) -> Option<Located<f64>> {
        match read {
            Ok(value) => Some(Located::new(value, place)),
            Err(error) => {
                let field = field.to_owned();
                self.fault(place, Cause::Quantity { field, error });
                None
            }
        }
    }

    /// A quantity for which zero makes no sense either.
    fn positive(
        &mut self,
        field: &str,
        raw: Field<RawQuantity>,
        dimension: Dimension,
    ) -> Option<Located<f64>> {
        let value = self.quantity(field, raw, dimension)?;
        if value.value <= 0.0 {
            self.above_zero(field, &value);
            return None;
        }
        Some(value)
    }

    fn above_zero(&mut self, field: &str, number: &Located<f64>) {
        self.fault(
            number.place,
            Cause::Range {
                field: field.to_owned(),
                value: number.value.to_string(),
                wanted: "but has to be above 0",
            },
        );
    }

    fn word<T>(
        &mut self,
        field: &str,
        word: &Located<String>,
        known: &'static [&'static str],
        read: impl FnOnce(&str) -> Option<T>,
    ) -> Option<T> {
        let found = read(&word.value);
        if found.is_none() {
            let cause = Cause::Word {
                field: field.to_owned(),
                word: word.value.clone(),
                nearest: nearest(&word.value, known.iter().copied()),
                known,
            };
            self.fault(word.place, cause);
        }
        found
    }

    fn refuse_twice(&mut self, field: &str, list: &[Located<String>]) {
        for (position, entry) in list.iter().enumerate() {
            if list[..position]
                .iter()
                .any(|earlier| earlier.value.trim() == entry.value.trim())
            {
                let cause = Cause::Twice {
                    field: field.to_owned(),
                    value: entry.value.clone(),
                };
                self.fault(entry.place, cause);
            }
        }
    }
}

/// A number written without quotes.
fn bare(number: f64, wanted: Dimension) -> Result<f64, UnitError> {
    let text = number.to_string();
    if !number.is_finite() {
        Err(UnitError::NotFinite { text, wanted })
    } else if wanted == Dimension::Number {
        Ok(number)
    } else {
        Err(UnitError::NoUnit { text, wanted })
    }
}
