//! The brief as written: every field with its place, nothing interpreted.
//!
//! Kinds of values and names of keys are judged here, meanings in `check`. A
//! field of the wrong kind is [`Field::Faulty`], so that nobody calls it
//! missing as well.

use toml_edit::{Document, Item, TableLike, Value};

use super::error::Cause;
use super::place::{Lines, Located, Place};
use crate::quantity::unit::nearest;

/// A field that may be left out.
#[derive(Clone, Debug, Default)]
pub(super) enum Field<T> {
    #[default]
    Absent,
    /// It is there, and a fault was reported.
    Faulty,
    Given(Located<T>),
}

impl<T> Field<T> {
    pub(super) fn is_absent(&self) -> bool {
        matches!(self, Self::Absent)
    }

    pub(super) fn given(self) -> Option<Located<T>> {
        match self {
            Self::Given(located) => Some(located),
            Self::Absent | Self::Faulty => None,
        }
    }

    pub(super) fn place(&self) -> Option<Place> {
        match self {
            Self::Given(located) => Some(located.place),
            Self::Absent | Self::Faulty => None,
        }
    }
}

/// A number with its unit as text, or a bare number.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum RawQuantity {
    Text(String),
    Number(f64),
}

impl RawQuantity {
    /// As a person would repeat it.
    pub(super) fn as_written(&self) -> String {
        match self {
            Self::Text(text) => text.trim().to_owned(),
            Self::Number(number) => number.to_string(),
        }
    }
}

/// A component by its name in `components` or by its position from 1.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum RawReference {
    Name(String),
    Position(i64),
}

/// A table with the name people know it by.
#[derive(Debug)]
pub(super) struct RawRange<T> {
    pub(super) place: Place,
    pub(super) at_least: Field<T>,
    pub(super) at_most: Field<T>,
}

#[derive(Debug)]
pub(super) struct RawSolventToFeed {
    pub(super) place: Place,
    pub(super) ratio: Field<f64>,
    pub(super) basis: Field<String>,
}

#[derive(Debug)]
pub(super) struct RawMixture {
    pub(super) place: Place,
    pub(super) components: Field<Vec<Located<String>>>,
    pub(super) keys: Field<Vec<Located<RawReference>>>,
    pub(super) fractions: Field<Vec<f64>>,
    pub(super) basis: Field<String>,
    pub(super) temperature: Field<RawQuantity>,
    pub(super) pressure: Field<RawQuantity>,
    pub(super) model: Field<Vec<Located<String>>>,
    pub(super) solvent_to_feed: Option<RawSolventToFeed>,
    /// Whether it is there, sound or not.
    pub(super) has_solvent_to_feed: bool,
    pub(super) estimates_for_keys: Field<bool>,
}

#[derive(Debug)]
pub(super) struct RawData {
    pub(super) place: Place,
    pub(super) folder: Field<String>,
}

#[derive(Debug)]
pub(super) struct RawPool {
    pub(super) place: Place,
    pub(super) file: Field<String>,
    pub(super) name_column: Field<String>,
    pub(super) smiles_column: Field<String>,
}

#[derive(Debug)]
pub(super) struct RawRanking {
    pub(super) by: Field<String>,
    pub(super) confidence: Field<f64>,
}

#[derive(Debug)]
pub(super) struct RawAssembly {
    pub(super) place: Place,
    pub(super) pieces: Field<Vec<Located<String>>>,
    pub(super) least: Field<u32>,
    pub(super) most: Field<u32>,
    pub(super) heavy_atoms: Option<RawRange<u32>>,
    pub(super) molar_mass: Field<RawQuantity>,
    pub(super) structures: Field<u32>,
    pub(super) allow: Field<Vec<Located<String>>>,
    pub(super) limits: Vec<(Located<String>, u32)>,
}

#[derive(Debug)]
pub(super) struct RawGroup {
    pub(super) set: Field<String>,
    pub(super) number: Field<u32>,
    pub(super) count: RawRange<u32>,
}

#[derive(Debug)]
pub(super) struct RawPattern {
    pub(super) name: Field<String>,
    pub(super) pattern: Field<String>,
    pub(super) count: RawRange<u32>,
}

#[derive(Debug, Default)]
pub(super) struct RawStructure {
    pub(super) allowed: Field<Vec<Located<String>>>,
    pub(super) forbidden: Field<Vec<Located<String>>>,
    pub(super) heavy_atoms: Option<RawRange<u32>>,
    pub(super) rings: Option<RawRange<u32>>,
    pub(super) molar_mass: Option<RawRange<RawQuantity>>,
    pub(super) atoms: Vec<(Located<String>, RawRange<u32>)>,
    pub(super) groups: Vec<RawGroup>,
    pub(super) patterns: Vec<RawPattern>,
}

#[derive(Debug)]
pub(super) struct RawTarget {
    pub(super) place: Place,
    /// What fields are named after: the figure, or `target 2` if it has none.
    pub(super) name: String,
    pub(super) figure: Field<String>,
    pub(super) component: Field<RawReference>,
    pub(super) temperature: Field<RawQuantity>,
    pub(super) at_least: Field<RawQuantity>,
    pub(super) at_most: Field<RawQuantity>,
    pub(super) close_to: Field<RawQuantity>,
    pub(super) tolerance: Field<RawQuantity>,
    pub(super) prefer: Field<String>,
    pub(super) worst: Field<RawQuantity>,
    pub(super) best: Field<RawQuantity>,
    pub(super) must: Field<bool>,
    pub(super) weight: Field<f64>,
}

/// The whole file.
#[derive(Debug, Default)]
pub(super) struct RawBrief {
    pub(super) title: Field<String>,
    pub(super) purpose: Field<String>,
    pub(super) mixture: Option<RawMixture>,
    pub(super) data: Option<RawData>,
    pub(super) pool: Option<RawPool>,
    pub(super) assembly: Option<RawAssembly>,
    pub(super) structure: RawStructure,
    pub(super) targets: Vec<RawTarget>,
    pub(super) keep_best: Field<u32>,
    pub(super) ranking: Option<RawRanking>,
    /// Whether there is a `target` at all, sound or not.
    pub(super) has_targets: bool,
    /// Whether there is a table of this name, sound or not.
    pub(super) has_mixture: bool,
    pub(super) has_pool: bool,
}

/// Words people try for a key that is called otherwise.
const SYNONYMS: [(&str, &str); 20] = [
    ("max", "at_most"),
    ("maximum", "at_most"),
    ("min", "at_least"),
    ("minimum", "at_least"),
    ("within", "tolerance"),
    ("value", "close_to"),
    ("property", "figure"),
    ("name", "figure"),
    ("required", "must"),
    ("targets", "target"),
    ("models", "model"),
    ("component", "components"),
    ("composition", "fractions"),
    ("path", "file"),
    ("dir", "folder"),
    ("directory", "folder"),
    ("groups", "group"),
    ("patterns", "pattern"),
    ("smarts", "pattern"),
    ("elements", "allowed_elements"),
];

fn nearest_key(key: &str, known: &'static [&'static str]) -> Option<&'static str> {
    let lower = key.to_ascii_lowercase();
    SYNONYMS
        .iter()
        .filter(|(word, _)| *word == lower)
        .find_map(|(_, meant)| known.iter().copied().find(|name| name == meant))
        .or_else(|| nearest(key, known.iter().copied()))
}

/// One table of the file.
#[derive(Clone)]
struct Section<'a> {
    table: &'a dyn TableLike,
    /// As a person would name it: `[mixture]` in backquotes.
    name: String,
    /// What goes before the name of a field.
    prefix: String,
    place: Place,
    /// Keys that unknown keys were probably meant for: their fault is told, so
    /// they are not to be called missing too.
    mistyped: Vec<&'static str>,
}

impl Section<'_> {
    fn has(&self, key: &str) -> bool {
        self.table.contains_key(key) || self.mistyped.contains(&key)
    }

    /// What a field is that the table does not hold.
    fn lacking<T>(&self, key: &str) -> Field<T> {
        match self.mistyped.contains(&key) {
            true => Field::Faulty,
            false => Field::Absent,
        }
    }
}

struct Reader<'a> {
    lines: Lines<'a>,
    faults: Vec<(Place, Cause)>,
}

/// Reads the text of a brief; faults come in no particular order.
pub(super) fn read(text: &str) -> (RawBrief, Vec<(Place, Cause)>) {
    let mut reader = Reader {
        lines: Lines::new(text),
        faults: Vec::new(),
    };
    let document = match Document::parse(text) {
        Ok(document) => document,
        Err(error) => {
            let place = reader.lines.start_of(error.span()).unwrap_or(Place::START);
            let message = error.message().split_whitespace().collect::<Vec<_>>();
            reader.faults.push((
                place,
                Cause::Syntax {
                    message: message.join(" "),
                },
            ));
            return (RawBrief::default(), reader.faults);
        }
    };
    let root = Section {
        table: document.as_table(),
        name: "the brief".into(),
        prefix: String::new(),
        place: Place::START,
        mistyped: Vec::new(),
    };
    let brief = reader.brief(root);
    (brief, reader.faults)
}

impl<'a> Reader<'a> {
    fn brief(&mut self, mut root: Section<'_>) -> RawBrief {
        self.refuse_unknown(
            &mut root,
            &[
                "title",
                "purpose",
                "mixture",
                "data",
                "pool",
                "assembly",
                "structure",
                "target",
                "keep",
                "ranking",
            ],
        );
        let root = &root;
        let mut brief = RawBrief {
            title: self.text(root, "title", "title = \"Entrainers for the pair\""),
            purpose: self.text(root, "purpose", "purpose = \"entrainer\""),
            has_targets: root.has("target"),
            has_mixture: root.has("mixture"),
            has_pool: root.has("pool"),
            ..RawBrief::default()
        };
        if let Some(mut section) = self.section(root, "mixture") {
            brief.mixture = Some(self.mixture(&mut section));
        }
        if let Some(mut section) = self.section(root, "data") {
            self.refuse_unknown(&mut section, &["folder"]);
            brief.data = Some(RawData {
                place: section.place,
                folder: self.text(&section, "folder", "folder = \"lab\""),
            });
        }
        if let Some(mut section) = self.section(root, "pool") {
            self.refuse_unknown(&mut section, &["file", "name_column", "smiles_column"]);
            brief.pool = Some(RawPool {
                place: section.place,
                file: self.text(&section, "file", "file = \"solvents.csv\""),
                name_column: self.text(&section, "name_column", "name_column = \"Solvent\""),
                smiles_column: self.text(&section, "smiles_column", "smiles_column = \"SMILES\""),
            });
        }
        if let Some(mut section) = self.section(root, "assembly") {
            brief.assembly = Some(self.assembly(&mut section));
        }
        if let Some(mut section) = self.section(root, "structure") {
            brief.structure = self.structure(&mut section);
        }
        let targets = self.sections(root, "target", "[[target]]");
        brief.targets = targets
            .into_iter()
            .enumerate()
            .map(|(position, section)| self.target(position, section))
            .collect();
        if let Some(mut section) = self.section(root, "keep") {
            self.refuse_unknown(&mut section, &["best"]);
            brief.keep_best = self.count(&section, "best", "best = 1000");
        }
        if let Some(mut section) = self.section(root, "ranking") {
            self.refuse_unknown(&mut section, &["by", "confidence"]);
            brief.ranking = Some(RawRanking {
                by: self.text(&section, "by", "by = \"expected-score\""),
                confidence: self.number(&section, "confidence", "confidence = 0.05"),
            });
        }
        brief
    }

    fn mixture(&mut self, section: &mut Section<'_>) -> RawMixture {
        self.refuse_unknown(
            section,
            &[
                "components",
                "keys",
                "fractions",
                "basis",
                "temperature",
                "pressure",
                "model",
                "solvent_to_feed",
                "estimates_for_keys",
            ],
        );
        let components = "components = [\"ethyl acetate\", \"CCO\"]";
        RawMixture {
            place: section.place,
            components: self.texts(section, "components", components, false),
            keys: self.list(
                section,
                "keys",
                ["a list of components", "a component or its position"],
                "keys = [\"ethyl acetate\", \"CCO\"]",
                reference,
            ),
            fractions: self.numbers(section, "fractions", "fractions = [0.54, 0.46]"),
            basis: self.text(section, "basis", "basis = \"mole\""),
            temperature: self.quantity(section, "temperature", "temperature = \"345 K\""),
            pressure: self.quantity(section, "pressure", "pressure = \"101.325 kPa\""),
            model: self.texts(section, "model", "model = \"unifac-dortmund\"", true),
            solvent_to_feed: self.solvent_to_feed(section),
            has_solvent_to_feed: section.has("solvent_to_feed"),
            estimates_for_keys: self.truth(
                section,
                "estimates_for_keys",
                "estimates_for_keys = true",
            ),
        }
    }

    /// `solvent_to_feed = 2.0` or `{ ratio = 2.0, basis = "mass" }`.
    fn solvent_to_feed(&mut self, section: &Section<'_>) -> Option<RawSolventToFeed> {
        let key = "solvent_to_feed";
        let (place, item) = self.item(section, key)?;
        if number(item).is_some() {
            return Some(RawSolventToFeed {
                place,
                ratio: self.number(section, key, "solvent_to_feed = 2.0"),
                basis: Field::Absent,
            });
        }
        let mut inner = self.section(section, key)?;
        self.refuse_unknown(&mut inner, &["ratio", "basis"]);
        Some(RawSolventToFeed {
            place,
            ratio: self.number(&inner, "ratio", "{ ratio = 2.0, basis = \"mole\" }"),
            basis: self.text(&inner, "basis", "{ ratio = 2.0, basis = \"mole\" }"),
        })
    }

    fn assembly(&mut self, section: &mut Section<'_>) -> RawAssembly {
        self.refuse_unknown(
            section,
            &[
                "pieces",
                "count",
                "heavy_atoms",
                "molar_mass",
                "structures",
                "allow",
                "limits",
            ],
        );
        let mut assembly = RawAssembly {
            place: section.place,
            pieces: self.texts(section, "pieces", "pieces = [\"CH3\", \"CH2\"]", false),
            least: Field::Absent,
            most: Field::Absent,
            heavy_atoms: None,
            molar_mass: Field::Absent,
            structures: self.count(section, "structures", "structures = 20"),
            allow: self.texts(section, "allow", "allow = [\"anhydride\"]", false),
            limits: Vec::new(),
        };
        if let Some(mut range) = self.section(section, "heavy_atoms") {
            assembly.heavy_atoms = Some(self.count_range(&mut range));
        }
        if let Some(mut range) = self.section(section, "molar_mass") {
            self.refuse_unknown(&mut range, &["at_most"]);
            assembly.molar_mass = self.quantity(
                &range,
                "at_most",
                "molar_mass = { at_most = \"200 g/mol\" }",
            );
        }
        let example = "count = { least = 2, most = 10 }";
        if let Some(mut count) = self.section(section, "count") {
            self.refuse_unknown(&mut count, &["least", "most"]);
            assembly.least = self.count(&count, "least", example);
            assembly.most = self.count(&count, "most", example);
        }
        if let Some(limits) = self.section(section, "limits") {
            for (name, place) in self.keys(&limits) {
                if let Field::Given(most) = self.count(&limits, &name, "limits = { \"OH\" = 2 }") {
                    assembly
                        .limits
                        .push((Located::new(name, place), most.value));
                }
            }
        }
        assembly
    }

    fn structure(&mut self, section: &mut Section<'_>) -> RawStructure {
        self.refuse_unknown(
            section,
            &[
                "allowed_elements",
                "forbidden_elements",
                "heavy_atoms",
                "rings",
                "molar_mass",
                "atoms",
                "group",
                "pattern",
            ],
        );
        let mut structure = RawStructure {
            allowed: self.texts(
                section,
                "allowed_elements",
                "allowed_elements = [\"C\", \"H\", \"O\"]",
                false,
            ),
            forbidden: self.texts(
                section,
                "forbidden_elements",
                "forbidden_elements = [\"Cl\", \"Br\"]",
                false,
            ),
            ..RawStructure::default()
        };
        if let Some(mut range) = self.section(section, "heavy_atoms") {
            structure.heavy_atoms = Some(self.count_range(&mut range));
        }
        if let Some(mut range) = self.section(section, "rings") {
            structure.rings = Some(self.count_range(&mut range));
        }
        if let Some(mut range) = self.section(section, "molar_mass") {
            self.refuse_unknown(&mut range, &RANGE_KEYS);
            structure.molar_mass = Some(RawRange {
                place: range.place,
                at_least: self.quantity(&range, "at_least", "at_least = \"60 g/mol\""),
                at_most: self.quantity(&range, "at_most", "at_most = \"150 g/mol\""),
            });
        }
        if let Some(atoms) = self.section(section, "atoms") {
            for (symbol, place) in self.keys(&atoms) {
                if let Some(mut range) = self.section(&atoms, &symbol) {
                    let range = self.count_range(&mut range);
                    structure.atoms.push((Located::new(symbol, place), range));
                }
            }
        }
        for mut group in self.sections(section, "group", "[[structure.group]]") {
            self.refuse_unknown(&mut group, &["set", "number", "at_least", "at_most"]);
            structure.groups.push(RawGroup {
                set: self.text(&group, "set", "set = \"unifac\""),
                number: self.count(&group, "number", "number = 14"),
                count: self.count_limits(&group),
            });
        }
        for mut pattern in self.sections(section, "pattern", "[[structure.pattern]]") {
            self.refuse_unknown(&mut pattern, &["name", "pattern", "at_least", "at_most"]);
            structure.patterns.push(RawPattern {
                name: self.text(&pattern, "name", "name = \"peroxide\""),
                pattern: self.text(&pattern, "pattern", "pattern = \"[O][O]\""),
                count: self.count_limits(&pattern),
            });
        }
        structure
    }

    fn target(&mut self, position: usize, mut section: Section<'_>) -> RawTarget {
        let figure = section.table.get("figure").and_then(Item::as_str);
        let name = match figure.map(str::trim) {
            Some(figure) if !figure.is_empty() => figure.to_owned(),
            _ => format!("target {}", position + 1),
        };
        section.prefix = format!("{name}.");
        section.name = match figure {
            Some(_) => format!("the target on `{name}`"),
            None => name.clone(),
        };
        self.refuse_unknown(
            &mut section,
            &[
                "figure",
                "component",
                "temperature",
                "at_least",
                "at_most",
                "close_to",
                "tolerance",
                "prefer",
                "worst",
                "best",
                "must",
                "weight",
            ],
        );
        RawTarget {
            place: section.place,
            name,
            figure: self.text(&section, "figure", "figure = \"boiling_point\""),
            component: self.value(
                &section,
                "component",
                "a component or its position",
                "component = \"ethyl acetate\"",
                |item| item.as_value().and_then(reference),
            ),
            temperature: self.quantity(&section, "temperature", "temperature = \"298.15 K\""),
            at_least: self.quantity(&section, "at_least", "at_least = \"390 K\""),
            at_most: self.quantity(&section, "at_most", "at_most = \"450 K\""),
            close_to: self.quantity(&section, "close_to", "close_to = \"420 K\""),
            tolerance: self.quantity(&section, "tolerance", "tolerance = \"20 K\""),
            prefer: self.text(&section, "prefer", "prefer = \"high\""),
            worst: self.quantity(&section, "worst", "worst = 1.0"),
            best: self.quantity(&section, "best", "best = 4.0"),
            must: self.truth(&section, "must", "must = true"),
            weight: self.number(&section, "weight", "weight = 1.0"),
        }
    }

    fn count_range(&mut self, section: &mut Section<'_>) -> RawRange<u32> {
        self.refuse_unknown(section, &RANGE_KEYS);
        self.count_limits(section)
    }

    fn count_limits(&mut self, section: &Section<'_>) -> RawRange<u32> {
        RawRange {
            place: section.place,
            at_least: self.count(section, "at_least", "at_least = 1"),
            at_most: self.count(section, "at_most", "at_most = 2"),
        }
    }

    // Fields of one kind each.

    fn text(&mut self, section: &Section<'_>, key: &str, example: &'static str) -> Field<String> {
        let field = self.value(section, key, "a text in quotes", example, |item| {
            item.as_str().map(str::to_owned)
        });
        match field {
            Field::Given(text) if text.value.trim().is_empty() => {
                self.empty(section, key, text.place);
                Field::Faulty
            }
            field => field,
        }
    }

    fn truth(&mut self, section: &Section<'_>, key: &str, example: &'static str) -> Field<bool> {
        self.value(section, key, "true or false", example, Item::as_bool)
    }

    fn number(&mut self, section: &Section<'_>, key: &str, example: &'static str) -> Field<f64> {
        let field = self.value(section, key, "a number", example, number);
        self.finite(section, key, field)
    }

    fn finite(&mut self, section: &Section<'_>, key: &str, field: Field<f64>) -> Field<f64> {
        match field {
            Field::Given(number) if !number.value.is_finite() => {
                self.faults.push((
                    number.place,
                    Cause::Range {
                        field: format!("{}{key}", section.prefix),
                        value: number.value.to_string(),
                        wanted: "but has to be finite",
                    },
                ));
                Field::Faulty
            }
            field => field,
        }
    }

    fn count(&mut self, section: &Section<'_>, key: &str, example: &'static str) -> Field<u32> {
        let field = self.value(section, key, "a whole number", example, Item::as_integer);
        match field {
            Field::Given(number) => match u32::try_from(number.value) {
                Ok(count) => Field::Given(number.map(|_| count)),
                Err(_) => {
                    self.faults.push((
                        number.place,
                        Cause::Range {
                            field: format!("{}{key}", section.prefix),
                            value: number.value.to_string(),
                            wanted: "but has to be from 0 to 4294967295",
                        },
                    ));
                    Field::Faulty
                }
            },
            Field::Absent => Field::Absent,
            Field::Faulty => Field::Faulty,
        }
    }

    fn quantity(
        &mut self,
        section: &Section<'_>,
        key: &str,
        example: &'static str,
    ) -> Field<RawQuantity> {
        let kind = "a number, or a text with its unit";
        self.value(section, key, kind, example, |item| {
            item.as_str()
                .map(|text| RawQuantity::Text(text.to_owned()))
                .or_else(|| number(item).map(RawQuantity::Number))
        })
    }

    fn numbers(
        &mut self,
        section: &Section<'_>,
        key: &str,
        example: &'static str,
    ) -> Field<Vec<f64>> {
        let field = self.list(
            section,
            key,
            ["a list of numbers", "a number"],
            example,
            |value| {
                value
                    .as_float()
                    .or_else(|| value.as_integer().map(|integer| integer as f64))
            },
        );
        match field {
            Field::Given(list) => {
                Field::Given(list.map(|list| list.into_iter().map(|entry| entry.value).collect()))
            }
            Field::Absent => Field::Absent,
            Field::Faulty => Field::Faulty,
        }
    }

    /// A list of texts, none of them empty; `or_one`: a single text will do.
    fn texts(
        &mut self,
        section: &Section<'_>,
        key: &str,
        example: &'static str,
        or_one: bool,
    ) -> Field<Vec<Located<String>>> {
        let is_text = section.table.get(key).is_some_and(Item::is_str);
        if or_one && is_text {
            return match self.text(section, key, example) {
                Field::Given(text) => {
                    let place = text.place;
                    Field::Given(Located::new(vec![text], place))
                }
                Field::Absent => Field::Absent,
                Field::Faulty => Field::Faulty,
            };
        }
        let field = self.list(
            section,
            key,
            ["a list of texts", "a text in quotes"],
            example,
            |value| value.as_str().map(str::to_owned),
        );
        if let Field::Given(list) = &field
            && let Some(blank) = list.value.iter().find(|text| text.value.trim().is_empty())
        {
            self.empty(section, key, blank.place);
            return Field::Faulty;
        }
        field
    }

    fn list<T>(
        &mut self,
        section: &Section<'_>,
        key: &str,
        [wanted, wanted_entry]: [&'static str; 2],
        example: &'static str,
        read: impl Fn(&Value) -> Option<T>,
    ) -> Field<Vec<Located<T>>> {
        let Some((place, item)) = self.item(section, key) else {
            return section.lacking(key);
        };
        let mut list = Vec::new();
        // Of several faulty entries the first is told: they tend to be alike.
        let mut fault = None;
        match item.as_array() {
            None => fault = Some((place, kind(item))),
            Some(array) => {
                for value in array {
                    let at = self.lines.start_of(value.span()).unwrap_or(place);
                    match read(value) {
                        Some(entry) => list.push(Located::new(entry, at)),
                        None => fault = fault.or(Some((at, value_kind(value)))),
                    }
                }
            }
        }
        match fault {
            None => Field::Given(Located::new(list, place)),
            Some((at, found)) => {
                let is_entry = item.is_array();
                self.faults.push((
                    at,
                    Cause::Kind {
                        field: format!("{}{key}", section.prefix),
                        is_entry,
                        found,
                        wanted: if is_entry { wanted_entry } else { wanted },
                        example,
                    },
                ));
                Field::Faulty
            }
        }
    }

    fn value<T>(
        &mut self,
        section: &Section<'_>,
        key: &str,
        wanted: &'static str,
        example: &'static str,
        read: impl FnOnce(&Item) -> Option<T>,
    ) -> Field<T> {
        let Some((place, item)) = self.item(section, key) else {
            return section.lacking(key);
        };
        match read(item) {
            Some(value) => Field::Given(Located::new(value, place)),
            None => {
                self.wrong_kind(section, key, place, kind(item), wanted, example);
                Field::Faulty
            }
        }
    }

    // Tables and their keys.

    fn section<'b>(&mut self, parent: &Section<'b>, key: &str) -> Option<Section<'b>> {
        let (place, item) = self.item(parent, key)?;
        match item.as_table_like() {
            Some(table) => Some(Section {
                table,
                name: format!("`[{}{key}]`", parent.prefix),
                prefix: format!("{}{key}.", parent.prefix),
                place,
                mistyped: Vec::new(),
            }),
            None => {
                let example = match key {
                    "count" => "count = { least = 2, most = 10 }",
                    "limits" => "limits = { \"OH\" = 2 }",
                    "solvent_to_feed" => "solvent_to_feed = { ratio = 2.0, basis = \"mole\" }",
                    "mixture" => "[mixture]",
                    "data" => "[data]",
                    "pool" => "[pool]",
                    "keep" => "[keep]",
                    "ranking" => "[ranking]",
                    "assembly" => "[assembly]",
                    "structure" => "[structure]",
                    "atoms" => "[structure.atoms]",
                    _ => "{ at_least = 1, at_most = 2 }",
                };
                self.wrong_kind(parent, key, place, kind(item), "a table", example);
                None
            }
        }
    }

    fn sections<'b>(
        &mut self,
        parent: &Section<'b>,
        key: &str,
        example: &'static str,
    ) -> Vec<Section<'b>> {
        let Some((place, item)) = self.item(parent, key) else {
            return Vec::new();
        };
        let tables: Option<Vec<(Option<Place>, &'b dyn TableLike)>> = match item {
            Item::ArrayOfTables(array) => Some(
                array
                    .iter()
                    .map(|table| {
                        (
                            self.lines.start_of(table.span()),
                            table as &'b dyn TableLike,
                        )
                    })
                    .collect(),
            ),
            Item::Value(Value::Array(array)) => array
                .iter()
                .map(|value| {
                    let table = value.as_inline_table()?;
                    Some((
                        self.lines.start_of(value.span()),
                        table as &'b dyn TableLike,
                    ))
                })
                .collect(),
            _ => None,
        };
        let Some(tables) = tables else {
            self.wrong_kind(parent, key, place, kind(item), "a list of tables", example);
            return Vec::new();
        };
        tables
            .into_iter()
            .enumerate()
            .map(|(position, (at, table))| Section {
                table,
                name: format!("`[[{}{key}]]` number {}", parent.prefix, position + 1),
                prefix: format!("{}{key} {}.", parent.prefix, position + 1),
                place: at.unwrap_or(place),
                mistyped: Vec::new(),
            })
            .collect()
    }

    /// The keys of a table whose names are free, in the order of the file.
    fn keys(&self, section: &Section<'_>) -> Vec<(String, Place)> {
        section
            .table
            .iter()
            .map(|(key, _)| (key.to_owned(), self.key_place(section, key)))
            .collect()
    }

    fn refuse_unknown(&mut self, section: &mut Section<'_>, known: &'static [&'static str]) {
        for (key, place) in self.keys(section) {
            if !known.contains(&key.as_str()) {
                let nearest = nearest_key(&key, known);
                section.mistyped.extend(nearest);
                self.faults.push((
                    place,
                    Cause::UnknownKey {
                        section: section.name.clone(),
                        key,
                        nearest,
                        known,
                    },
                ));
            }
        }
    }

    fn key_place(&self, section: &Section<'_>, key: &str) -> Place {
        section
            .table
            .key(key)
            .and_then(|key| self.lines.start_of(key.span()))
            .unwrap_or(section.place)
    }

    /// A value with its place: where the value begins, or its key for a table.
    fn item<'b>(&self, section: &Section<'b>, key: &str) -> Option<(Place, &'b Item)> {
        let item = section.table.get(key).filter(|item| !item.is_none())?;
        let own = match item {
            Item::Value(value) => self.lines.start_of(value.span()),
            _ => None,
        };
        Some((own.unwrap_or_else(|| self.key_place(section, key)), item))
    }

    fn empty(&mut self, section: &Section<'_>, key: &str, place: Place) {
        let field = format!("{}{key}", section.prefix);
        self.faults.push((place, Cause::Empty { field }));
    }

    fn wrong_kind(
        &mut self,
        section: &Section<'_>,
        key: &str,
        place: Place,
        found: &'static str,
        wanted: &'static str,
        example: &'static str,
    ) {
        self.faults.push((
            place,
            Cause::Kind {
                field: format!("{}{key}", section.prefix),
                is_entry: false,
                found,
                wanted,
                example,
            },
        ));
    }
}

const RANGE_KEYS: [&str; 2] = ["at_least", "at_most"];

fn number(item: &Item) -> Option<f64> {
    item.as_float()
        .or_else(|| item.as_integer().map(|integer| integer as f64))
}

fn reference(value: &Value) -> Option<RawReference> {
    value
        .as_str()
        .map(|name| RawReference::Name(name.to_owned()))
        .or_else(|| value.as_integer().map(RawReference::Position))
}

fn kind(item: &Item) -> &'static str {
    match item {
        Item::None => "nothing",
        Item::Value(value) => value_kind(value),
        Item::Table(_) => "a table",
        Item::ArrayOfTables(_) => "a list of tables",
    }
}

fn value_kind(value: &Value) -> &'static str {
    match value {
        Value::String(_) => "a text",
        Value::Integer(_) => "a whole number",
        Value::Float(_) => "a decimal number",
        Value::Boolean(_) => "a truth value",
        Value::Datetime(_) => "a date or time",
        Value::Array(_) => "a list",
        Value::InlineTable(_) => "a table",
    }
}
