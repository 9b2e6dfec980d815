//! What can be wrong with a brief.

use std::fmt;
use std::path::PathBuf;
use std::sync::Arc;

use thiserror::Error;

use super::fractions::FractionError;
use super::place::Place;
use crate::quantity::unit::UnitError;

/// Why there is no [`Brief`](super::Brief).
#[derive(Debug, Error)]
pub enum BriefError {
    /// The file could not be read.
    #[error("{}: cannot be read: {source}", .path.display())]
    Unreadable {
        /// The path.
        path: PathBuf,
        /// What the system said.
        source: std::io::Error,
    },
    /// The path names no file.
    #[error("{}: there is no such file", .path.display())]
    Missing {
        /// The path.
        path: PathBuf,
    },
    /// The path names a folder.
    #[error("{}: is a folder\n  name the brief in it, for example {}", .path.display(), .path.join("brief.toml").display())]
    Folder {
        /// The path.
        path: PathBuf,
    },
    /// The file is larger than any brief.
    #[error("{}: holds {bytes} bytes; a brief has at most {largest}\n  a candidate list is named by `file` in `[pool]`, not given as the brief", .path.display())]
    TooLarge {
        /// The path.
        path: PathBuf,
        /// Size of the file.
        bytes: u64,
        /// Largest size read.
        largest: u64,
    },
    /// The file is not UTF-8 text.
    #[error("{}:{line}: is not UTF-8 text\n  a brief is a TOML file; save it as UTF-8", .path.display())]
    NotText {
        /// The path.
        path: PathBuf,
        /// The line with the first byte that is not text, from 1.
        line: u32,
    },
    /// The text has faults.
    #[error(transparent)]
    Faults(#[from] Faults),
}

/// Every fault of a brief, in the order of their places; never empty.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{}", Lines(.0))]
pub struct Faults(pub(super) Vec<Fault>);

impl Faults {
    /// The faults.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &Fault> {
        self.0.iter()
    }
}

struct Lines<'a>(&'a [Fault]);

impl fmt::Display for Lines<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, fault) in self.0.iter().enumerate() {
            if position > 0 {
                f.write_str("\n")?;
            }
            fault.fmt(f)?;
        }
        Ok(())
    }
}

/// One fault of a brief. Shown as `file:line: cause` and, below, the remedy.
#[derive(Clone, Debug, PartialEq)]
pub struct Fault {
    /// Name of the brief.
    pub file: Arc<str>,
    /// Where it is.
    pub place: Place,
    /// What it is.
    pub cause: Cause,
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}: {}", self.file, self.place.line, self.cause)?;
        if let Some(remedy) = self.cause.remedy() {
            write!(f, "\n  {remedy}")?;
        }
        Ok(())
    }
}

/// What is wrong at a place of the brief.
///
/// `field` names a field as a person would: `mixture.basis`, or
/// `boiling_point.at_least` for a field of the target on the boiling point.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Cause {
    /// The text is not TOML.
    #[error("is not TOML: {message}")]
    Syntax {
        /// What the reader said, on one line.
        message: String,
    },
    /// A key that means nothing here.
    #[error("`{key}` is not a field of {section}")]
    UnknownKey {
        /// The table, as a person would name it.
        section: String,
        /// The key as written.
        key: String,
        /// The key it may have been meant for.
        nearest: Option<&'static str>,
        /// The keys that are known here.
        known: &'static [&'static str],
    },
    /// A value of another kind.
    #[error("{}`{field}` is {found}, not {wanted}", if *.is_entry { "an entry of " } else { "" })]
    Kind {
        /// The field.
        field: String,
        /// Whether it is an entry of the field, which is a list.
        is_entry: bool,
        /// What it is.
        found: &'static str,
        /// What it should be.
        wanted: &'static str,
        /// How it is written.
        example: &'static str,
    },
    /// A text with nothing in it.
    #[error("`{field}` is empty")]
    Empty {
        /// The field.
        field: String,
    },
    /// A field or table that has to be there.
    #[error("{section} has no `{key}`")]
    Missing {
        /// The table, as a person would name it.
        section: String,
        /// What is missing.
        key: &'static str,
        /// How it is written.
        example: &'static str,
    },
    /// Not a quantity of the needed dimension.
    #[error("`{field}` {error}")]
    Quantity {
        /// The field.
        field: String,
        /// What is wrong with it.
        error: UnitError,
    },
    /// A number outside what makes sense.
    #[error("`{field}` is {value}, {wanted}")]
    Range {
        /// The field.
        field: String,
        /// The number as written.
        value: String,
        /// What it should be: `but has to be above 0`.
        wanted: &'static str,
    },
    /// A word that is none of a short list.
    #[error("`{field}` is `{word}`, which is not a choice there")]
    Word {
        /// The field.
        field: String,
        /// The word as written.
        word: String,
        /// The word it may have been meant for.
        nearest: Option<&'static str>,
        /// The words there are.
        known: &'static [&'static str],
    },
    /// A figure that does not exist.
    #[error("`{figure}` is not a figure")]
    UnknownFigure {
        /// The name as written.
        figure: String,
        /// The figure it may have been meant for.
        nearest: Option<&'static str>,
        /// Every figure.
        known: Vec<&'static str>,
    },
    /// A model that does not exist.
    #[error("`{model}` is not a model")]
    UnknownModel {
        /// The name as written.
        model: String,
        /// The model it may have been meant for.
        nearest: Option<&'static str>,
        /// The models that are built in.
        built_in: Vec<&'static str>,
    },
    /// A model whose name is reserved.
    #[error("model `{model}` is not built in yet")]
    ModelNotBuiltIn {
        /// The name.
        model: &'static str,
        /// The models that are built in.
        built_in: Vec<&'static str>,
    },
    /// An element that molecules here cannot hold.
    #[error("`{field}` names `{symbol}`, which is not an element known here")]
    UnknownElement {
        /// The field.
        field: String,
        /// The symbol as written.
        symbol: String,
    },
    /// The fractions are not those of the components.
    #[error("`mixture.fractions` {error}")]
    Fractions {
        /// What is wrong with them.
        error: FractionError,
    },
    /// A component that the mixture does not hold.
    #[error("`{field}` names `{name}`, which is not among the components")]
    UnknownComponent {
        /// The field.
        field: String,
        /// The name as written.
        name: String,
        /// The components.
        components: Vec<String>,
    },
    /// The same thing twice.
    #[error("`{field}` holds `{value}` twice")]
    Twice {
        /// The field.
        field: String,
        /// What stands twice.
        value: String,
    },
    /// A target that wants nothing.
    #[error("the target on `{figure}` does not say what is wanted")]
    NothingWanted {
        /// The figure.
        figure: String,
    },
    /// A target that wants two kinds of thing.
    #[error("the target on `{figure}` has both `{first}` and `{second}`")]
    TwoWants {
        /// The figure.
        figure: String,
        /// One of them.
        first: &'static str,
        /// The other.
        second: &'static str,
    },
    /// A field that belongs to another kind of target.
    #[error("`{field}` has no meaning without `{needed}`")]
    Stray {
        /// The field.
        field: String,
        /// What it belongs to.
        needed: &'static str,
    },
    /// `at_least` above `at_most`.
    #[error("`{field}` asks for at least {at_least} and at most {at_most}, which nothing can be")]
    Reversed {
        /// The target or limit.
        field: String,
        /// The lower limit as written.
        at_least: String,
        /// The upper limit as written.
        at_most: String,
    },
    /// The ends of a preference do not fit its direction.
    #[error(
        "the target on `{figure}` prefers {prefer}, but `worst` is {worst} and `best` is {best}"
    )]
    Scale {
        /// The figure.
        figure: String,
        /// `high` or `low`.
        prefer: &'static str,
        /// The worst end as written.
        worst: String,
        /// The best end as written.
        best: String,
    },
    /// A figure lacks something it is computed from.
    #[error("`{figure}` needs {needed}, which the brief does not give")]
    Needs {
        /// The figure.
        figure: &'static str,
        /// What is missing.
        needed: &'static str,
        /// How it is given.
        remedy: &'static str,
    },
    /// A field the figure does not take.
    #[error("`{figure}` does not take `{field}`")]
    NotTaken {
        /// The figure.
        figure: &'static str,
        /// The field.
        field: &'static str,
        /// Why not.
        reason: &'static str,
    },
    /// A limit that limits nothing.
    #[error("{section} has neither `at_least` nor `at_most`")]
    NoLimit {
        /// The limit, as a person would name it.
        section: String,
    },
}

impl Cause {
    /// How to mend it, where that can be said.
    pub fn remedy(&self) -> Option<String> {
        match self {
            Self::Syntax { .. } => None,
            Self::UnknownKey { nearest, known, .. } | Self::Word { nearest, known, .. } => {
                Some(suggestion(*nearest, known))
            }
            Self::Kind { example, .. } | Self::Missing { example, .. } => {
                Some(format!("for example  {example}"))
            }
            Self::Empty { .. } => Some("write something in it, or leave the line out".into()),
            Self::Quantity { error, .. } => Some(error.remedy()),
            Self::Range { .. } => None,
            Self::UnknownFigure { nearest, known, .. } => Some(suggestion(*nearest, known)),
            Self::UnknownModel {
                nearest, built_in, ..
            } => Some(suggestion(*nearest, built_in)),
            Self::ModelNotBuiltIn { built_in, .. } => Some(suggestion(None, built_in)),
            Self::UnknownElement { .. } => {
                let symbols = crate::chem::Element::ALL.map(crate::chem::Element::symbol);
                Some(suggestion(None, &symbols))
            }
            Self::Fractions { error } => Some(
                match error {
                    FractionError::Count { .. } => "give one fraction for each component",
                    FractionError::Range { .. } => "a fraction is a number from 0 to 1",
                    FractionError::Sum { .. } => {
                        "correct the fractions; they are not rescaled beyond rounding"
                    }
                }
                .into(),
            ),
            Self::UnknownComponent { components, .. } => Some(format!(
                "write it as in `components`: {}",
                listed(components)
            )),
            Self::Twice { .. } => Some("leave one of them out".into()),
            Self::NothingWanted { .. } => Some(
                "give `at_least` and/or `at_most`, or `close_to`, or `prefer` with `worst` and `best`"
                    .into(),
            ),
            Self::TwoWants { .. } => Some("split it into two targets on the same figure".into()),
            Self::Stray { needed, .. } => Some(format!("leave it out, or give `{needed}`")),
            Self::Reversed { .. } => Some("exchange the two".into()),
            Self::Scale { prefer, .. } => Some(
                match *prefer {
                    "high" => "`best` is above `worst` where high is preferred",
                    _ => "`best` is below `worst` where low is preferred",
                }
                .into(),
            ),
            Self::Needs { remedy, .. } => Some((*remedy).into()),
            Self::NotTaken { reason, .. } => Some((*reason).into()),
            Self::NoLimit { .. } => Some("`at_most = 0` forbids, `at_least = 1` demands".into()),
        }
    }
}

fn suggestion<S: AsRef<str>>(nearest: Option<&str>, known: &[S]) -> String {
    match nearest {
        Some(name) => format!("nearest: `{name}`; accepted: {}", listed(known)),
        None => format!("accepted: {}", listed(known)),
    }
}

fn listed<S: AsRef<str>>(names: &[S]) -> String {
    let mut list = String::new();
    for name in names {
        if !list.is_empty() {
            list.push_str(", ");
        }
        list.push_str(name.as_ref());
    }
    list
}
