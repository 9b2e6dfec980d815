//! A component of the user's mixture, with everything models ask of it.

use std::sync::Arc;

use smallvec::SmallVec;

use super::Library;
use super::error::UnknownMolecule;
use super::profile::{Known, Profile, Profiler, SAME_TEMPERATURE_K, properties};
use crate::data::VaporPressure;
use crate::data::pairs::PairIdentity;
use crate::pure::Estimates;
use crate::pure::corresponding_states::VaporPressureCurve;
use crate::pure::vapor_pressure_curve;
use crate::quantity::{
    Absent, Estimate, Flag, Flags, Property, PropertySet, REFERENCE_TEMPERATURE_K,
    STANDARD_ATMOSPHERE_PA,
};

/// Vapor pressure of a substance as a function of temperature.
#[derive(Clone, Debug)]
pub enum VaporCurve {
    /// A correlation of measured values.
    Measured(VaporPressure),
    /// A corresponding-states method through the boiling point.
    Estimated(VaporPressureCurve),
    /// There is none.
    Absent(Absent),
}

impl VaporCurve {
    /// Properties that an estimated curve is made of.
    pub(super) const PROPERTIES: PropertySet = PropertySet::NONE
        .with(Property::BoilingPoint)
        .with(Property::CriticalTemperature)
        .with(Property::CriticalPressure);

    /// The curve of a molecule: measured where known, else estimated.
    pub(super) fn of(library: &Library, profile: &Profile, known: Option<Known<'_>>) -> Self {
        if let Some(curve) = known.and_then(|known| known.substance.vapor_pressure()) {
            return Self::Measured(curve.clone());
        }
        let all = properties(library, profile, known, REFERENCE_TEMPERATURE_K);
        Self::estimated(library, profile, &all).unwrap_or_else(Self::Absent)
    }

    /// The curve of a candidate of which the user has measured values of their
    /// own: the measured one moved through them, else the lines between them.
    /// Else it is estimated from its properties.
    pub(super) fn of_candidate(
        library: &Library,
        profile: &Profile,
        known: Option<Known<'_>>,
        own: &[(Property, Estimate)],
        all: &Estimates,
    ) -> Result<Self, Absent> {
        let curve = known.and_then(|known| known.substance.vapor_pressure());
        let mut points: SmallVec<[(f64, f64, &Estimate); 4]> = own
            .iter()
            .filter_map(|(property, found)| match property {
                Property::BoilingPoint => Some((found.value, STANDARD_ATMOSPHERE_PA, found)),
                Property::VaporPressure => Some((found.temperature_k?, found.value, found)),
                _ => None,
            })
            .collect();
        points.sort_by(|one, other| one.0.total_cmp(&other.0));
        points.dedup_by(|later, one| later.0 - one.0 <= SAME_TEMPERATURE_K);
        if points.is_empty() {
            return match curve {
                Some(curve) => Ok(Self::Measured(curve.clone())),
                None => Self::estimated(library, profile, all),
            };
        }
        let line: SmallVec<[(f64, f64); 4]> = points.iter().map(|&(t, p, _)| (t, p)).collect();
        let sources: SmallVec<[&str; 4]> = points
            .iter()
            .filter_map(|(_, _, found)| found.source.as_deref())
            .collect();
        let source = sources.join("; ");
        match curve {
            Some(curve) => Ok(Self::Measured(curve.moved_or_flagged(&line, &source))),
            None => VaporPressure::between(&line, source.into()).map_or_else(
                || Self::estimated(library, profile, all),
                |curve| Ok(Self::Measured(curve)),
            ),
        }
    }

    /// The estimated curve that goes with a set of estimates.
    pub(super) fn estimated(
        library: &Library,
        profile: &Profile,
        all: &Estimates,
    ) -> Result<Self, Absent> {
        let constants = [
            Property::BoilingPoint,
            Property::CriticalTemperature,
            Property::CriticalPressure,
        ]
        .map(|property| &all[property as usize]);
        let h_vap = &all[Property::EnthalpyOfVaporization as usize];
        let method = library.methods().vapor_pressure;
        vapor_pressure_curve(method, &profile.facts, constants, h_vap).map(Self::Estimated)
    }

    /// Vapor pressure in Pa at a temperature in K.
    ///
    /// # Errors
    ///
    /// There is no curve, or it does not reach that far.
    pub fn pressure_pa(&self, temperature_k: f64) -> Result<f64, Absent> {
        match self {
            Self::Measured(curve) => curve.pressure_pa(temperature_k).map_err(Absent::from),
            Self::Estimated(curve) => curve.pressure_pa(temperature_k),
            Self::Absent(reason) => Err(reason.clone()),
        }
    }

    /// Temperatures in K between which there is a value; everything where there
    /// is no curve, which then is the reason that is told.
    pub(super) fn limits_k(&self) -> (f64, f64) {
        match self {
            Self::Measured(curve) => curve.limits_k(),
            Self::Estimated(curve) => curve.limits_k(),
            Self::Absent(_) => (0.0, f64::INFINITY),
        }
    }

    /// What the reader of a value at this temperature has to know.
    pub fn flags_at(&self, temperature_k: f64) -> Flags {
        match self {
            Self::Measured(curve) => curve.flags_at(temperature_k),
            Self::Estimated(_) => Flags::NONE.with(Flag::RestsOnEstimate),
            Self::Absent(_) => Flags::NONE,
        }
    }

    /// Whether it contradicts other data of the substance.
    pub(super) fn is_contradicted(&self) -> bool {
        match self {
            Self::Measured(curve) => curve.is_contradicted(),
            Self::Estimated(_) | Self::Absent(_) => false,
        }
    }

    /// Whether it rests on measured values.
    pub fn is_measured(&self) -> bool {
        matches!(self, Self::Measured(_))
    }
}

/// Temperatures in K between which boiling points are sought: those that all
/// curves reach, within [`WIDEST_BOILING_RANGE_K`].
pub(super) fn boiling_range_k<'a>(curves: impl Iterator<Item = &'a VaporCurve>) -> (f64, f64) {
    let (low, high) = curves.map(VaporCurve::limits_k).fold(
        WIDEST_BOILING_RANGE_K,
        // A hair inside, so that rounding does not step over an end.
        |(low, high), (from, to)| (low.max(from * (1.0 + 1e-9)), high.min(to * (1.0 - 1e-9))),
    );
    // Curves that share no temperature: let the first of them say so.
    if low < high {
        (low, high)
    } else {
        WIDEST_BOILING_RANGE_K
    }
}

/// Widest range in which boiling points are sought, K.
const WIDEST_BOILING_RANGE_K: (f64, f64) = (120.0, 900.0);

/// A component of the user's mixture.
#[derive(Clone, Debug)]
pub struct MixtureComponent {
    /// What to call it: the name of the substance if it is known, else as written.
    pub name: Arc<str>,
    /// Its structure.
    pub profile: Profile,
    /// Position of the measured substance, where there is one.
    known: Option<(usize, bool)>,
    /// What it is called in the pair tables; empty where measured data are left out.
    pub(super) in_pairs: PairIdentity,
    /// Vapor pressure.
    pub vapor: VaporCurve,
}

impl MixtureComponent {
    /// Finds a component by name, CAS number or SMILES; `use_measured` says
    /// whether measured data are drawn on.
    ///
    /// # Errors
    ///
    /// The text is neither.
    pub fn find(
        library: &Library,
        profiler: &mut Profiler,
        text: &str,
        use_measured: bool,
    ) -> Result<Self, UnknownMolecule> {
        let (name, profile) = library.find(profiler, text)?;
        let known = library.known(&profile.keys).filter(|_| use_measured);
        let in_pairs = match use_measured {
            true => library.pairs().identify(&profile.keys),
            false => PairIdentity::default(),
        };
        let name = known.filter(|known| known.same_identity).map_or_else(
            || name.unwrap_or_else(|| text.trim().into()),
            |known| Arc::clone(known.substance.name()),
        );
        let vapor = match VaporCurve::of(library, &profile, known) {
            VaporCurve::Absent(reason) => {
                VaporCurve::Absent(profiler.explained(library, &profile, &reason))
            }
            curve => curve,
        };
        let known = known.map(|known| (library.position(known.substance), known.same_identity));
        Ok(Self {
            name,
            profile,
            known,
            in_pairs,
            vapor,
        })
    }

    /// Measured data of the component.
    pub fn known<'l>(&self, library: &'l Library) -> Option<Known<'l>> {
        let (position, same_identity) = self.known?;
        Some(Known {
            substance: library.substance(position),
            same_identity,
        })
    }

    /// Molar volume of the pure liquid in m³/mol at a temperature, with flags.
    ///
    /// # Errors
    ///
    /// Why the density is absent.
    pub fn molar_volume_m3_per_mol(
        &self,
        library: &Library,
        temperature_k: f64,
    ) -> Result<(f64, Flags), Absent> {
        let all = properties(library, &self.profile, self.known(library), temperature_k);
        let density = all[Property::LiquidDensity as usize]
            .as_ref()
            .map_err(Absent::clone)?;
        let flags = if density.status == crate::quantity::Status::Measured {
            density.flags
        } else {
            density.flags.with(Flag::RestsOnEstimate)
        };
        Ok((
            self.profile.facts.molar_mass_kg_per_mol / density.value,
            flags,
        ))
    }

    /// Boiling point in K for a first guess; absent where nothing is known.
    pub(super) fn boiling_guess_k(&self, library: &Library) -> Option<f64> {
        let all = properties(
            library,
            &self.profile,
            self.known(library),
            REFERENCE_TEMPERATURE_K,
        );
        all[Property::BoilingPoint as usize]
            .as_ref()
            .ok()
            .map(|found| found.value)
    }
}
