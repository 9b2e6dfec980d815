//! A value with its origin, or the reason why there is none.

use std::fmt;
use std::sync::Arc;

use super::Property;

/// How a value was come by.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Status {
    /// Computed by a published method.
    Estimated,
    /// Taken from a measurement, or from a correlation fitted to measurements.
    Measured,
}

impl Status {
    /// The word of the `status` column.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Estimated => "estimated",
            Self::Measured => "measured",
        }
    }
}

/// Something the reader of a value has to know about it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[repr(u8)]
pub enum Flag {
    /// The method was used outside the temperatures its source states.
    OutsideTemperatureRange,
    /// The molecule is larger or of another kind than the source covers.
    OutsideFamily,
    /// The value rests on another estimate, not on a measurement.
    RestsOnEstimate,
    /// Estimates of this molecule contradict one another.
    Inconsistent,
    /// Data of a substance of the same constitution, but another stereoisomer or isotope.
    OtherStereoisomer,
    /// A carboxylic acid takes part: vapor association is not modelled.
    VaporAssociationNotModelled,
    /// A correlation was used beyond the range it was fitted on.
    Extrapolated,
    /// The substance is solid at the temperature: the value is of the supercooled liquid.
    BelowMeltingPoint,
}

impl Flag {
    /// Every flag, in bit order.
    pub const ALL: [Self; 8] = [
        Self::OutsideTemperatureRange,
        Self::OutsideFamily,
        Self::RestsOnEstimate,
        Self::Inconsistent,
        Self::OtherStereoisomer,
        Self::VaporAssociationNotModelled,
        Self::Extrapolated,
        Self::BelowMeltingPoint,
    ];

    /// What it says to a person.
    pub const fn text(self) -> &'static str {
        match self {
            Self::OutsideTemperatureRange => "outside the method's temperature range",
            Self::OutsideFamily => "outside the molecules the method was made for",
            Self::RestsOnEstimate => "rests on other estimates",
            Self::Inconsistent => "contradicts another estimate of this molecule",
            Self::OtherStereoisomer => "data of another stereoisomer or isotope",
            Self::VaporAssociationNotModelled => "vapor association not modelled",
            Self::Extrapolated => "extrapolated beyond the fitted range",
            Self::BelowMeltingPoint => "solid at this temperature",
        }
    }
}

/// A set of [`Flag`]s.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Flags(u16);

impl Flags {
    /// No flag.
    pub const NONE: Self = Self(0);

    /// This set with one more flag.
    #[must_use]
    pub const fn with(self, flag: Flag) -> Self {
        Self(self.0 | 1 << flag as u16)
    }

    /// Flags of either set.
    #[must_use]
    pub const fn union(self, other: Self) -> Self {
        Self(self.0 | other.0)
    }

    /// Whether the flag is set.
    pub const fn contains(self, flag: Flag) -> bool {
        self.0 & (1 << flag as u16) != 0
    }

    /// Whether no flag is set.
    pub const fn is_empty(self) -> bool {
        self.0 == 0
    }

    /// The flags of the set, in fixed order.
    pub fn iter(self) -> impl Iterator<Item = Flag> {
        Flag::ALL
            .into_iter()
            .filter(move |&flag| self.contains(flag))
    }
}

impl fmt::Display for Flags {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, flag) in self.iter().enumerate() {
            if position > 0 {
                f.write_str("; ")?;
            }
            f.write_str(flag.text())?;
        }
        Ok(())
    }
}

/// A finite value in SI units with its origin.
#[derive(Clone, Debug, PartialEq)]
pub struct Estimate {
    /// The value in the SI unit of its property.
    pub value: f64,
    /// 90 % interval in the same unit, where the method states one.
    pub interval: Option<(f64, f64)>,
    /// The temperature the value belongs to, where it depends on one.
    pub temperature_k: Option<f64>,
    /// Identifier of the method, or `measured`.
    pub method: &'static str,
    /// Estimated or measured.
    pub status: Status,
    /// What the reader has to know.
    pub flags: Flags,
    /// Published source of a measured value.
    pub source: Option<Arc<str>>,
    /// What in this molecule makes an estimate doubtful, in words.
    pub note: Option<Arc<str>>,
}

impl Estimate {
    /// An estimate without interval, temperature or flags.
    pub const fn new(value: f64, method: &'static str) -> Self {
        Self {
            value,
            interval: None,
            temperature_k: None,
            method,
            status: Status::Estimated,
            flags: Flags::NONE,
            source: None,
            note: None,
        }
    }

    /// The same estimate, said to belong to a temperature.
    #[must_use]
    pub const fn at(mut self, temperature_k: f64) -> Self {
        self.temperature_k = Some(temperature_k);
        self
    }

    /// The same estimate with more flags.
    #[must_use]
    pub const fn flagged(mut self, flags: Flags) -> Self {
        self.flags = self.flags.union(flags);
        self
    }
}

/// Why there is no value.
#[derive(Clone, Debug, PartialEq)]
pub enum Absent {
    /// Some atom of the molecule is in no group of the set.
    NotCovered {
        /// Identifier of the group set.
        set: &'static str,
        /// The uncovered part in a chemist's words.
        what: Arc<str>,
    },
    /// A group has no contribution to this property in the published table.
    NoContribution {
        /// Identifier of the method.
        method: &'static str,
        /// Formula of the group as printed.
        group: Arc<str>,
    },
    /// The interaction of two main groups was never published.
    NoInteraction {
        /// Identifier of the model.
        model: &'static str,
        /// Name of one main group.
        first: Arc<str>,
        /// Name of the other main group.
        second: Arc<str>,
    },
    /// A value this one needs is itself absent.
    Needs {
        /// The missing property.
        property: Property,
    },
    /// The state lies where the method has no meaning or the data no range.
    OutsideRange {
        /// Identifier of the method, or `measured`.
        method: &'static str,
        /// The temperature asked for, in K.
        temperature_k: f64,
        /// Lower end in K.
        low_k: f64,
        /// Upper end in K.
        high_k: f64,
    },
    /// The closing function of the method has no value here (a logarithm or root of a negative number, say).
    OutsideDomain {
        /// Identifier of the method.
        method: &'static str,
        /// What happens, in words.
        what: &'static str,
    },
    /// An iteration did not reach its tolerance.
    NotConverged {
        /// Identifier of the method.
        method: &'static str,
        /// Steps taken.
        iterations: u32,
        /// What was left.
        residual: f64,
    },
    /// No method for this property is built in.
    NoMethod,
    /// Only a measured value would do, and there is none.
    NotMeasured {
        /// The property.
        property: Property,
        /// The substance.
        substance: Arc<str>,
    },
    /// Another reason, in words.
    Because(Arc<str>),
}

impl fmt::Display for Absent {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NotCovered { set, what } => write!(f, "not covered by {set}: {what}"),
            Self::NoContribution { method, group } => {
                write!(f, "{method} has no published contribution for {group}")
            }
            Self::NoInteraction {
                model,
                first,
                second,
            } => write!(
                f,
                "{model}: the interaction of main groups {first} and {second} is not published"
            ),
            Self::Needs { property } => write!(f, "needs {}, which is absent", property.id()),
            Self::OutsideRange {
                method,
                temperature_k,
                low_k,
                high_k,
            } => write!(
                f,
                "{method}: {temperature_k:.2} K is outside {low_k:.2} K to {high_k:.2} K"
            ),
            Self::OutsideDomain { method, what } => write!(f, "{method}: {what}"),
            Self::NotConverged {
                method,
                iterations,
                residual,
            } => write!(
                f,
                "{method} did not converge in {iterations} steps (residual {residual:.3e})"
            ),
            Self::NoMethod => f.write_str("no method for this property is built in"),
            Self::NotMeasured {
                property,
                substance,
            } => write!(
                f,
                "needs a measured {} of {substance}, and none is known",
                property.id()
            ),
            Self::Because(reason) => f.write_str(reason),
        }
    }
}

/// A value or the reason why there is none.
pub type Outcome = Result<Estimate, Absent>;
