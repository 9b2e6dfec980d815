//! What the search knows of each piece and each target: linear sums with their
//! limits, closing functions, activity.

use smallvec::SmallVec;
use thiserror::Error;

use super::account::Account;
use super::limits::Limits;
use super::piece::{Pieces, Role};
use super::search::{Judged, rarity_bucket, rarity_of};
use super::space::{CLASSES, COUNTERS, Counters, Space};
use crate::chem::Composition;
use crate::evaluate::{Quick, QuickFigure, Spread};
use crate::groups::{GroupCounts, SetId};
use crate::mixture::{CandidateLanes, Component, KeysAtTemperature, SharedGroups, Unifac};
use crate::numeric::lanes::Instructions;
use crate::numeric::{NORMAL_90, normal_cdf};
use crate::pure::fitted::{
    ClassCounts, CountModel, Fitted, Known, Level, Quantity, expansion_to_298,
};
use crate::table::{Table, TableError};

/// Whole numbers of a sum in one: 2³².
const UNITS: f64 = 4_294_967_296.0;

/// What rounding may make of a sum of pieces, in such units, times the atoms.
const ROUNDING: f64 = 65_536.0;

/// Whole numbers of a mass in one kg/mol.
const MASS_UNITS: f64 = 1e9;

/// Where quantities stand among the models of a job.
const BOILING_POINT: usize = 0;
const MOLAR_VOLUME: usize = 1;

/// A linear sum that a target bounds: n·Σ by_count + Σ by_share, n heavy atoms.
pub(super) struct Form<'f> {
    /// Which target.
    pub(super) target: usize,
    model: Option<CountModel<'f>>,
    /// The density that a molar volume is compared at: the form is then the volume
    /// less the mass over this density.
    density: Option<f64>,
    /// Lowest and highest wanted sum, in the unit of the sum.
    low: f64,
    high: f64,
    /// How many half widths of the 90 % interval the limits are widened by.
    reach: f64,
    /// Whether more than the sum decides, so that the window only tells what is missed.
    needs_more: bool,
}

/// Where the value of a form, a whole number, has to lie.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Window {
    /// Below this the target is missed, its error considered.
    pub(super) low: i64,
    /// Above this it is.
    pub(super) high: i64,
    /// From here on the target may surely be met, whatever the sum does to its error …
    pub(super) sure_low: i64,
    /// … up to here.
    pub(super) sure_high: i64,
}

impl Form<'_> {
    /// The window of the form in molecules of one size, rounded outward, and its
    /// sure part rounded inward.
    pub(super) fn window(&self, n: f64, classes: &ClassCounts, rarity: f64) -> Window {
        // the mass is a sum over pieces, not a mean over atoms
        let scale = if self.model.is_some() { n } else { 1.0 };
        let (mut fixed, mut narrow, mut wide) = (0.0, 0.0, 0.0);
        if let Some(model) = &self.model {
            let (by_count, by_share) = model.products(classes);
            fixed = n * (model.size(n) + by_count) + by_share;
            let (least, most) = model.half_widths(n, rarity, classes);
            (narrow, wide) = (n * self.reach * least, n * self.reach * most);
        }
        let (low, high) = (self.low * scale - fixed, self.high * scale - fixed);
        let whole = |value: f64| (value * UNITS).clamp(-9.0e18, 9.0e18);
        if self.needs_more {
            return Window {
                low: (whole(low - wide) - ROUNDING).floor() as i64,
                high: (whole(high + wide) + ROUNDING).ceil() as i64,
                sure_low: i64::MAX,
                sure_high: i64::MIN,
            };
        }
        Window {
            low: (whole(low - wide) - ROUNDING).floor() as i64,
            high: (whole(high + wide) + ROUNDING).ceil() as i64,
            sure_low: (whole(low - narrow) + ROUNDING).ceil() as i64,
            sure_high: (whole(high + narrow) - ROUNDING).floor() as i64,
        }
    }
}

/// Surface in main groups, by place in [`Job::mains`].
type Areas = SmallVec<[(u8, f64); 3]>;

/// What a member of the space adds.
#[derive(Clone, Debug, Default)]
pub(super) struct Measures {
    /// Molar mass in whole numbers.
    pub(super) mass: i64,
    /// By form: by count, by share.
    pub(super) forms: SmallVec<[[i64; 2]; 6]>,
    pub(super) classes: ClassCounts,
    /// The most it can add to the rarity of any model.
    pub(super) rarity: f64,
    /// Whether something that a must needs is not known of it.
    pub(super) gap: bool,
    /// By model of the job: by count, by share.
    sums: SmallVec<[[f64; 2]; 6]>,
    heavy: u32,
    composition: Composition,
    molar_mass_kg_per_mol: f64,
    /// Its groups in the set of the activity model.
    groups: Option<GroupCounts>,
    /// Relative volume, and surface in each main group, by place in [`Job::mains`].
    r: f64,
    areas: Areas,
    /// Its main groups as bits.
    pub(super) mains: u64,
}

/// Names of the rules on counts that are built in.
///
/// # Errors
///
/// The table of rules is broken.
pub fn count_rules(pieces: &Pieces) -> Result<Vec<CountRule>, JobError> {
    Ok(read_rules(pieces)?)
}

/// A rule on counts: two classes that may not be in one molecule.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CountRule {
    /// Its name.
    pub name: String,
    /// Why.
    pub why: String,
    /// Classes as bits.
    either: u32,
    other: u32,
}

/// A search that cannot begin.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum JobError {
    /// The table of rules.
    #[error(transparent)]
    Table(#[from] TableError),
}

/// Everything a search works with; shared by all threads.
pub struct Job<'j> {
    pub(super) pieces: &'j Pieces,
    pub(super) space: Space,
    pub(super) quick: Quick<'j>,
    pub(super) forms: Vec<Form<'j>>,
    /// For each target, whether a form bounds it.
    bounded: Vec<bool>,
    pub(super) measures: Vec<Measures>,
    /// Functional chain pieces, places in the space.
    pub(super) functional: Vec<usize>,
    /// CH3, CH2, CH, C: places in the space.
    pub(super) tail: [Option<usize>; 4],
    /// Counters that a limit may stop at, and whether kinds of groups are among them.
    pub(super) limited: [bool; COUNTERS],
    pub(super) kinds_matter: bool,
    pub(super) tail_rarity: f64,
    /// Main groups of plain carbons, as bits.
    pub(super) tail_mains: u64,
    pub(super) most_mass: i64,
    pub(super) largest: u8,
    rules: Vec<CountRule>,
    models: Vec<CountModel<'j>>,
    activity: Option<(&'j Unifac, SetId, &'j KeysAtTemperature)>,
    /// Published numbers of the main groups that members have.
    mains: Vec<u16>,
    /// Half widths that limits are widened by.
    reach: f64,
}

/// The names of the plain carbons, in the order of the tail.
const TAIL: [&str; 4] = ["CH3", "CH2", "CH", "C"];

/// The file of the rules on counts.
const TOGETHER: (&str, &str) = (
    "groups/pieces/together.csv",
    include_str!("../../groups/pieces/together.csv"),
);

/// How many half widths of a 90 % interval a limit is widened by, so that a must
/// is kept whose probability is not below the confidence.
fn reach(confidence: f64) -> f64 {
    if confidence <= 0.0 {
        return 0.0;
    }
    // the distribution function has no inverse of its own: it rises, so halving finds it
    let (mut low, mut high) = (-40.0, 40.0);
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if normal_cdf(middle) < confidence {
            low = middle
        } else {
            high = middle
        }
    }
    (-high / NORMAL_90).max(0.0)
}

impl<'j> Job<'j> {
    /// Binds pieces and limits to a plan.
    ///
    /// # Errors
    ///
    /// The table of rules is broken.
    pub fn new(
        pieces: &'j Pieces,
        limits: &Limits,
        quick: Quick<'j>,
        fitted: &'j Fitted,
        allowed: &[&str],
    ) -> Result<Self, JobError> {
        let space = Space::new(pieces, limits);
        let mut quantities = vec![Quantity::BoilingPoint, Quantity::MolarVolume];
        for target in &quick.targets {
            if let QuickFigure::Fitted(quantity) = target.figure
                && !quantities.contains(&quantity)
            {
                quantities.push(quantity);
            }
        }
        let needed = quick
            .targets
            .iter()
            .any(|target| matches!(target.figure, QuickFigure::Fitted(_) | QuickFigure::Density));
        let models: Vec<CountModel<'j>> = match needed {
            true => quantities
                .iter()
                .map(|&one| fitted.count_model(one))
                .collect(),
            false => Vec::new(),
        };
        let reach = reach(quick.plan().brief.ranking.confidence);
        let forms = forms(&quick, &quantities, &models, reach);
        let activity = quick.keys();
        let must_activity = activity.is_some();
        let mut job = Self {
            pieces,
            functional: space
                .of_role(Role::Chain)
                .filter(|&at| !is_tail(pieces, &space, at))
                .collect(),
            tail: TAIL.map(|name| {
                let piece = pieces.find(name)? as u16;
                space
                    .members
                    .iter()
                    .position(|member| member.piece == piece)
            }),
            limited: [false; COUNTERS],
            kinds_matter: false,
            tail_rarity: 0.0,
            tail_mains: 0,
            most_mass: (limits.molar_mass_kg_per_mol * MASS_UNITS).floor() as i64,
            largest: u8::try_from(limits.heavy_atoms.1).unwrap_or(u8::MAX),
            rules: {
                let mut rules = read_rules(pieces)?;
                rules.retain(|rule| !allowed.contains(&rule.name.as_str()));
                rules
            },
            measures: Vec::new(),
            space,
            quick,
            forms: Vec::new(),
            bounded: Vec::new(),
            models,
            activity,
            mains: Vec::new(),
            reach,
        };
        let members: Vec<usize> = (0..job.space.members.len()).collect();
        for counter in job.space.watched(&members) {
            job.limited[counter] = true;
        }
        job.kinds_matter = job.space.kinds_matter(&members);
        job.mains = job.main_groups();
        let members = job.space.members.iter();
        job.measures = members
            .map(|member| job.measure(usize::from(member.piece), fitted, &forms, must_activity))
            .collect();
        let targets = 0..job.quick.targets.len();
        job.bounded = targets
            .map(|at| forms.iter().any(|form| form.target == at))
            .collect();
        job.forms = forms;
        let tail = job.tail.iter().flatten();
        job.tail_rarity = tail.clone().map(|&at| job.measures[at].rarity).sum();
        job.tail_mains = tail.fold(0, |mains, &at| mains | job.measures[at].mains);
        Ok(job)
    }

    /// Main groups of the members in the set of the activity model.
    fn main_groups(&self) -> Vec<u16> {
        let Some((unifac, set, _)) = self.activity else {
            return Vec::new();
        };
        let members = self.space.members.iter();
        let counts = members.filter_map(|member| {
            self.pieces.all[usize::from(member.piece)].groups[set as usize].as_ref()
        });
        let groups = counts.flat_map(|counts| counts.iter().map(|(number, _)| number));
        let mut mains: Vec<u16> = groups
            .filter_map(|number| Some(unifac.tables().subgroup(number)?.main_group))
            .collect();
        mains.sort_unstable();
        mains.dedup();
        // more than there are bits for: those with later ones count as not published
        mains.truncate(64);
        mains
    }

    /// Relative volume and surfaces of groups; `None` where one is not in the tables.
    fn surfaces(&self, groups: &GroupCounts) -> Option<(f64, Areas)> {
        let (unifac, _, _) = self.activity?;
        let mut r = 0.0;
        let mut areas = Areas::new();
        for (number, count) in groups.iter() {
            let group = unifac.tables().subgroup(number)?;
            let place = self
                .mains
                .iter()
                .position(|&main| main == group.main_group)? as u8;
            r += f64::from(count) * group.r;
            let area = f64::from(count) * group.q;
            match areas.iter_mut().find(|one| one.0 == place) {
                Some(known) => known.1 += area,
                None => areas.push((place, area)),
            }
        }
        Some((r, areas))
    }

    fn measure(
        &self,
        piece: usize,
        fitted: &Fitted,
        forms: &[Form<'_>],
        must_activity: bool,
    ) -> Measures {
        let piece = &self.pieces.all[piece];
        let mass = piece.composition.molar_mass_kg_per_mol();
        let whole = |value: f64| (value * UNITS).round() as i64;
        let of = |model: &CountModel<'_>| model.piece(&piece.environments);
        let set = self.activity.map(|(_, set, _)| set);
        let groups = set.and_then(|set| piece.groups[set as usize].clone());
        let surfaces = groups.as_ref().and_then(|groups| self.surfaces(groups));
        let unknown = must_activity && surfaces.is_none();
        let (r, areas) = surfaces.unwrap_or_default();
        // boiling point and volume are needed by all that rests on them
        let needs = |quantity: Quantity| {
            let base = matches!(quantity, Quantity::BoilingPoint | Quantity::MolarVolume);
            let musts = self.quick.targets.iter().filter(|target| target.must);
            musts.into_iter().any(|target| match target.figure {
                QuickFigure::Fitted(own) => {
                    own == quantity || base && own.terms(Level::Count).rests_on_others
                }
                QuickFigure::Density => base,
                _ => false,
            })
        };
        let new_kind = self
            .models
            .iter()
            .any(|model| of(model).new_kind && needs(model.quantity()));
        let rings = match piece.role {
            Role::Whole => {
                let rings = piece.environments.iter();
                let key = crate::groups::environment::Environment::Shape(
                    crate::groups::environment::ShapeFact::Rings,
                )
                .key();
                rings
                    .filter(|one| one.0 == key)
                    .map(|one| one.2 as u8)
                    .sum()
            }
            _ => 0,
        };
        Measures {
            mass: (mass * MASS_UNITS).round() as i64,
            forms: forms
                .iter()
                .map(|form| match &form.model {
                    None => [0, whole(mass * 1e3)],
                    Some(model) => {
                        let sum = of(model);
                        let share = match form.density {
                            Some(density) => sum.by_share - mass * 1e5 / density,
                            None => sum.by_share,
                        };
                        [whole(sum.by_count), whole(share)]
                    }
                })
                .collect(),
            classes: ClassCounts::of(fitted.table(), &piece.environments, rings),
            rarity: self
                .models
                .iter()
                .map(|model| of(model).rarity)
                .fold(0.0, f64::max),
            gap: new_kind || unknown,
            sums: self
                .models
                .iter()
                .map(|model| {
                    let sum = of(model);
                    [sum.by_count, sum.by_share]
                })
                .collect(),
            heavy: piece.heavy_atoms(),
            composition: piece.composition,
            molar_mass_kg_per_mol: mass,
            groups,
            mains: areas.iter().map(|one| 1_u64 << one.0).sum(),
            r,
            areas,
        }
    }

    /// An empty account.
    pub(super) fn account(&self) -> Account {
        Account::new(self.quick.targets.len(), 1 + self.rules.len())
    }

    /// Names of what [`Account::cut_by_rule`] counts, in its order.
    pub fn rule_names(&self) -> impl Iterator<Item = &str> {
        std::iter::once("molar_mass").chain(self.rules.iter().map(|rule| rule.name.as_str()))
    }

    /// The rule on counts at a place of [`rule_names`](Self::rule_names); the first place is
    /// the molar mass, which is none.
    pub(super) fn count_rule(&self, at: usize) -> Option<&CountRule> {
        self.rules.get(at.checked_sub(1)?)
    }

    /// The space.
    pub fn space(&self) -> &Space {
        &self.space
    }

    /// The targets.
    pub fn quick(&self) -> &Quick<'j> {
        &self.quick
    }

    /// The first rule on counts that these counters break; rule 0 is the mass.
    pub(super) fn rule_that_cuts(&self, counters: &Counters) -> Option<usize> {
        let classes = counters[CLASSES..].iter().enumerate();
        let present: u32 = classes
            .filter(|(_, number)| **number > 0)
            .map(|(class, _)| 1 << class)
            .sum();
        let breaks = |rule: &CountRule| present & rule.either != 0 && present & rule.other != 0;
        self.rules.iter().position(breaks).map(|at| at + 1)
    }

    /// Pieces (places in the table, ascending) of members and a tail.
    pub(super) fn assembly(
        &self,
        members: &[(u16, u8)],
        tail: [u8; 4],
    ) -> SmallVec<[(u16, u8); 12]> {
        let piece = |member: usize| self.space.members[member].piece;
        let mut all: SmallVec<[(u16, u8); 12]> = members
            .iter()
            .map(|&(member, count)| (piece(usize::from(member)), count))
            .collect();
        for (member, count) in self.tail.iter().zip(tail) {
            if let (Some(member), 1..) = (member, count) {
                all.push((piece(*member), count));
            }
        }
        all.sort_unstable();
        all
    }

    /// The members of the space that an assembly is made of.
    ///
    /// # Panics
    ///
    /// If a piece of it is off.
    pub(super) fn members_of(&self, assembly: &[(u16, u8)]) -> SmallVec<[(u16, u8); 12]> {
        let place = |piece: u16| {
            let found = self.space.members.iter().position(|one| one.piece == piece);
            found.expect("every piece is on") as u16
        };
        assembly
            .iter()
            .map(|&(piece, count)| (place(piece), count))
            .collect()
    }

    fn each<'a>(
        &'a self,
        members: &'a [(u16, u8)],
        tail: &'a [u8; 4],
    ) -> impl Iterator<Item = (&'a Measures, u8)> {
        let own = members
            .iter()
            .map(|&(member, count)| (usize::from(member), count));
        let plain = self.tail.iter().zip(tail);
        let plain = plain.filter_map(|(member, &count)| Some(((*member)?, count)));
        own.chain(plain)
            .filter(|one| one.1 > 0)
            .map(|(member, count)| (&self.measures[member], count))
    }

    /// The activity of main groups given as bits; `None` where an interaction that it
    /// needs is not published, or none is needed.
    pub(super) fn shared_groups(&self, mains: u64) -> Option<SharedGroups> {
        let (_, _, keys) = self.activity?;
        let used = self.mains.iter().enumerate();
        let used: Vec<u16> = used
            .filter(|(at, _)| mains >> at & 1 == 1)
            .map(|(_, &main)| main)
            .collect();
        if used.is_empty() {
            return None;
        }
        SharedGroups::new(keys, &used).ok()
    }

    /// Whether targets ask for activity.
    pub(super) fn asks_activity(&self) -> bool {
        self.activity.is_some()
    }

    /// ln γ∞ of the keys in a prefix with each of some tails, which have the main groups
    /// of `shared`, given as bits, in common.
    pub(super) fn ln_gamma_inf(
        &self,
        shared: &SharedGroups,
        mains: u64,
        members: &[(u16, u8)],
        tails: &[[u8; 4]],
        scratch: &mut ActivityScratch,
    ) {
        let places: SmallVec<[u8; 8]> = (0..self.mains.len() as u8)
            .filter(|at| mains >> at & 1 == 1)
            .collect();
        let n = tails.len();
        let ActivityScratch {
            r,
            q,
            areas,
            ln_gamma,
        } = scratch;
        areas.resize(areas.len().max(places.len()), Vec::new());
        let mut base_r = 0.0;
        let mut base: SmallVec<[f64; 8]> = SmallVec::from_elem(0.0, places.len());
        let place_of = |main: u8| {
            places
                .iter()
                .position(|&place| place == main)
                .expect("shared")
        };
        for &(member, count) in members {
            let own = &self.measures[usize::from(member)];
            base_r += own.r * f64::from(count);
            for &(main, area) in &own.areas {
                base[place_of(main)] += area * f64::from(count);
            }
        }
        r.clear();
        r.resize(n, base_r);
        for (column, &area) in areas.iter_mut().zip(&base) {
            column.clear();
            column.resize(n, area);
        }
        for (which, member) in self.tail.iter().enumerate() {
            let Some(member) = *member else { continue };
            let own = &self.measures[member];
            for (r, tail) in r.iter_mut().zip(tails) {
                *r += own.r * f64::from(tail[which]);
            }
            for &(main, area) in &own.areas {
                // without plain carbons their group may be absent
                let Some(place) = places.iter().position(|&place| place == main) else {
                    continue;
                };
                for (sum, tail) in areas[place].iter_mut().zip(tails) {
                    *sum += area * f64::from(tail[which]);
                }
            }
        }
        q.clear();
        q.resize(n, 0.0);
        for column in &areas[..places.len()] {
            for (q, area) in q.iter_mut().zip(column) {
                *q += area;
            }
        }
        for of_key in ln_gamma.iter_mut() {
            of_key.clear();
            of_key.resize(n, 0.0);
        }
        let columns: SmallVec<[&[f64]; 8]> =
            areas[..places.len()].iter().map(Vec::as_slice).collect();
        let [first, second] = ln_gamma;
        let candidates = CandidateLanes {
            r,
            q,
            areas: &columns,
        };
        shared.ln_gamma_inf(
            Instructions::Best,
            &candidates,
            &mut [first.as_mut_slice(), second.as_mut_slice()],
        );
    }

    fn component(&self, members: &[(u16, u8)], tail: &[u8; 4]) -> Option<Component> {
        let (unifac, _, _) = self.activity?;
        let mut counts = GroupCounts::new();
        for (measures, count) in self.each(members, tail) {
            for (number, groups) in measures.groups.as_ref()?.iter() {
                counts.add(number, groups * u16::from(count));
            }
        }
        unifac.component(&counts).ok()
    }

    /// The 90 % interval that ends widened by the reach go with.
    fn ninety(&self, value: f64, (low, high): (f64, f64)) -> (f64, f64) {
        let scaled = |end: f64| value + (end - value) / self.reach;
        (scaled(low), scaled(high))
    }

    /// Figures and score of an assembly by itself.
    pub(super) fn judge_alone(&self, members: &[(u16, u8)], tail: [u8; 4]) -> Judged {
        let all = self.each(members, &tail);
        let mains = all.map(|(own, _)| own.mains).fold(0, |all, own| all | own);
        let mut scratch = ActivityScratch::default();
        let mut ln_gamma = None;
        if self.asks_activity() {
            let Some(shared) = self.shared_groups(mains) else {
                return Judged::NotAssessable;
            };
            self.ln_gamma_inf(&shared, mains, members, &[tail], &mut scratch);
            ln_gamma = Some(scratch.of(0));
        }
        self.judge(members, tail, ln_gamma, false)
    }

    /// Figures and score of an assembly, its activity given; `sure`: every linear sum
    /// lies where its must may surely be met.
    pub(super) fn judge(
        &self,
        members: &[(u16, u8)],
        tail: [u8; 4],
        ln_gamma: Option<[f64; 2]>,
        sure: bool,
    ) -> Judged {
        let mut whole: Option<Whole<'_, '_>> = None;
        let ln_gamma = ln_gamma.filter(|both| {
            let plausible = crate::data::pairs::PLAUSIBLE_LN_GAMMA_INFINITY;
            both.iter().all(|value| plausible.contains(value))
        });
        let (mut sum, mut weights, mut advance) = (0.0, 0.0, 0.0);
        let mut probability = 1.0;
        for (at, target) in self.quick.targets.iter().enumerate() {
            if target.figure == QuickFigure::Dear {
                continue;
            }
            let bounded = self.bounded[at];
            if sure && bounded && target.weight == 0.0 && self.reach == 0.0 {
                continue;
            }
            let make = || Whole::new(self, members, &tail);
            let of_activity = matches!(
                target.figure,
                QuickFigure::OfKey { .. } | QuickFigure::OfKeys { .. }
            );
            let value = match target.figure {
                QuickFigure::Dear => continue,
                QuickFigure::MolarMass => Some((whole.get_or_insert_with(make).mass, None)),
                QuickFigure::Density => whole.get_or_insert_with(make).density(),
                QuickFigure::Fitted(quantity) => whole.get_or_insert_with(make).fitted(quantity),
                figure @ (QuickFigure::OfKey { .. } | QuickFigure::OfKeys { .. }) => {
                    let by_mass = matches!(figure, QuickFigure::OfKey { by_mass: true, .. });
                    let mass = match by_mass {
                        true => whole.get_or_insert_with(make).mass,
                        false => 1.0,
                    };
                    ln_gamma.and_then(|both| Some((value_of_activity(figure, both, mass)?, None)))
                }
            };
            let Some((value, ends)) = value else {
                if target.must {
                    return Judged::NotAssessable;
                }
                continue;
            };
            if target.must && !target.want.is_met(value) {
                let (low, high) = target.want.met_range();
                let may = match (ends, ln_gamma) {
                    (Some((least, most)), _) => most >= low && least <= high,
                    (None, Some(both)) if of_activity => self
                        .component(members, &tail)
                        .is_some_and(|one| self.quick.may_meet(at, &one, both, value)),
                    _ => false,
                };
                if !may {
                    return Judged::Missed {
                        target: at,
                        by_bound: bounded,
                    };
                }
            }
            if let (true, Some(ends)) = (target.must && self.reach > 0.0, ends) {
                let spread = Spread::new(value, self.ninety(value, ends));
                probability *= spread.probability(&target.want);
            }
            if target.weight > 0.0 {
                weights += target.weight;
                sum += target.weight * target.want.desirability(value).ln();
                advance += target.weight * target.want.advance(value);
            }
        }
        let (score, advance) = match weights > 0.0 {
            true => ((sum / weights).exp(), advance / weights),
            false => (1.0, 0.0),
        };
        Judged::Scored {
            score: score * probability,
            advance,
        }
    }
}

/// Columns of candidates for the activity, and what comes of them.
#[derive(Clone, Debug, Default)]
pub(super) struct ActivityScratch {
    r: Vec<f64>,
    q: Vec<f64>,
    areas: Vec<Vec<f64>>,
    ln_gamma: [Vec<f64>; 2],
}

impl ActivityScratch {
    /// ln γ∞ of the keys in the candidate at a place.
    pub(super) fn of(&self, at: usize) -> [f64; 2] {
        [self.ln_gamma[0][at], self.ln_gamma[1][at]]
    }
}

fn value_of_activity(figure: QuickFigure, ln_gamma: [f64; 2], mass: f64) -> Option<f64> {
    let value = match figure {
        QuickFigure::OfKey {
            key,
            power,
            factor,
            by_mass,
        } => {
            let value = (power * ln_gamma[key]).exp() * factor;
            if by_mass { value / mass } else { value }
        }
        QuickFigure::OfKeys { factor, undirected } => {
            let value = (ln_gamma[0] - ln_gamma[1]).exp() * factor;
            if undirected {
                value.max(1.0 / value)
            } else {
                value
            }
        }
        _ => return None,
    };
    value.is_finite().then_some(value)
}

/// An assembly with what several figures rest on.
struct Whole<'a, 'j> {
    job: &'a Job<'j>,
    sums: SmallVec<[[f64; 2]; 6]>,
    classes: ClassCounts,
    rarity: f64,
    n: f64,
    mass: f64,
    composition: Composition,
    /// Boiling point and molar volume with the ends of their widened intervals.
    known: [Option<(f64, (f64, f64))>; 2],
}

impl<'a, 'j> Whole<'a, 'j> {
    fn new(job: &'a Job<'j>, members: &[(u16, u8)], tail: &[u8; 4]) -> Self {
        let mut whole = Self {
            job,
            sums: SmallVec::from_elem([0.0; 2], job.models.len()),
            classes: ClassCounts::default(),
            rarity: job.tail_rarity,
            n: 0.0,
            mass: 0.0,
            composition: Composition::default(),
            known: [None; 2],
        };
        let mut heavy = 0;
        for (measures, count) in job.each(members, tail) {
            let times = f64::from(count);
            for (sum, add) in whole.sums.iter_mut().zip(&measures.sums) {
                sum[0] += add[0] * times;
                sum[1] += add[1] * times;
            }
            whole.classes.add(&measures.classes, count);
            heavy += measures.heavy * u32::from(count);
            whole.mass += measures.molar_mass_kg_per_mol * times;
            whole
                .composition
                .add_times(&measures.composition, u16::from(count));
        }
        for &(member, _) in members {
            whole.rarity += job.measures[usize::from(member)].rarity;
        }
        if members.iter().any(|one| {
            matches!(
                job.space.roles[usize::from(one.0)],
                Role::Aromatic | Role::Ring
            )
        }) {
            whole.classes = whole.classes.with_ring();
        }
        whole.n = f64::from(heavy);
        if !job.models.is_empty() {
            whole.known = [BOILING_POINT, MOLAR_VOLUME].map(|at| whole.closed(at, None));
        }
        whole
    }

    /// The value of a model with the ends of its interval, widened by the reach.
    fn closed(&self, at: usize, known: Option<Known>) -> Option<(f64, (f64, f64))> {
        let model = &self.job.models[at];
        let (by_count, by_share) = model.products(&self.classes);
        let [own_count, own_share] = self.sums[at];
        let sum = own_count
            + by_count
            + (own_share + by_share) / self.n
            + model.size(self.n)
            + model.inputs(self.n, known);
        let rarity = rarity_of(rarity_bucket(self.rarity));
        let half = self.job.reach * model.half_width(self.n, rarity, &self.classes, sum);
        let quantity = model.quantity();
        let closed = |sum: f64| quantity.closed(sum, self.n, known);
        let value = closed(sum)?;
        Some((
            value,
            (closed(sum - half).unwrap_or(0.0), closed(sum + half)?),
        ))
    }

    fn fitted(&self, quantity: Quantity) -> Option<(f64, Option<(f64, f64)>)> {
        if quantity == Quantity::FlashPoint
            && crate::pure::StructureFacts::new(self.composition, self.mass).burns_doubtfully()
        {
            return None;
        }
        let at = self
            .job
            .models
            .iter()
            .position(|model| model.quantity() == quantity)?;
        let found = match at {
            BOILING_POINT | MOLAR_VOLUME => self.known[at],
            _ => {
                let known = match self.known {
                    [
                        Some((boiling_point_k, _)),
                        Some((molar_volume_m3_per_mol, _)),
                    ] => Some(Known {
                        boiling_point_k,
                        molar_volume_m3_per_mol,
                        molar_mass_kg_per_mol: self.mass,
                    }),
                    _ => None,
                };
                if quantity.terms(Level::Count).rests_on_others {
                    known?;
                }
                self.closed(at, known)
            }
        };
        found.map(|(value, ends)| (value, Some(ends)))
    }

    /// Density at 298.15 K: the fitted volume may be one at a lower temperature.
    fn density(&self) -> Option<(f64, Option<(f64, f64)>)> {
        let (boiling_point_k, _) = self.known[BOILING_POINT]?;
        let (volume, (low, high)) = self.known[MOLAR_VOLUME]?;
        let expansion = expansion_to_298(boiling_point_k)?;
        let of = |volume: f64| self.mass / (volume * expansion);
        let most = if low > 0.0 { of(low) } else { f64::MAX };
        Some((of(volume), Some((of(high), most))))
    }
}

fn is_tail(pieces: &Pieces, space: &Space, member: usize) -> bool {
    let name = &pieces.all[usize::from(space.members[member].piece)].name;
    TAIL.contains(&name.as_str())
}

fn forms<'j>(
    quick: &Quick<'_>,
    quantities: &[Quantity],
    models: &[CountModel<'j>],
    reach: f64,
) -> Vec<Form<'j>> {
    let mut forms = Vec::new();
    for (at, target) in quick.targets.iter().enumerate().filter(|one| one.1.must) {
        let (low, high) = target.want.met_range();
        let model = |quantity: Quantity| {
            let at = quantities.iter().position(|&known| known == quantity)?;
            models.get(at).copied()
        };
        // a sum that stands for a limit; one that has none bounds nothing
        let sum = |quantity: Quantity, value: f64, none: f64| match value.is_finite() {
            true => quantity.opened(value, 1.0, None).unwrap_or(none),
            false => none,
        };
        match target.figure {
            QuickFigure::MolarMass => forms.push(Form {
                target: at,
                model: None,
                density: None,
                low: if low.is_finite() {
                    low * 1e3
                } else {
                    f64::NEG_INFINITY
                },
                high: if high.is_finite() {
                    high * 1e3
                } else {
                    f64::INFINITY
                },
                reach: 0.0,
                needs_more: false,
            }),
            QuickFigure::Fitted(
                quantity @ (Quantity::BoilingPoint
                | Quantity::MeltingPoint
                | Quantity::LogPOctanolWater),
            ) => {
                // squares: a limit below zero is no limit
                let low = if quantity == Quantity::LogPOctanolWater {
                    low
                } else {
                    low.max(0.0)
                };
                forms.push(Form {
                    target: at,
                    model: model(quantity),
                    density: None,
                    low: sum(quantity, low, f64::NEG_INFINITY),
                    high: sum(quantity, high, f64::INFINITY),
                    reach,
                    needs_more: false,
                });
            }
            // the volume is that at 298.15 K or lower, where the liquid is denser: too thin
            // there is too thin here, but nothing bounds a density from above
            QuickFigure::Density if low.is_finite() && low > 0.0 => forms.push(Form {
                target: at,
                model: model(Quantity::MolarVolume),
                density: Some(low),
                low: f64::NEG_INFINITY,
                high: 0.0,
                reach,
                needs_more: true,
            }),
            _ => {}
        }
    }
    forms
}

fn read_rules(pieces: &Pieces) -> Result<Vec<CountRule>, TableError> {
    let table = Table::read(TOGETHER.0, TOGETHER.1)?;
    let name = table.column("name")?;
    let either = table.column("either")?;
    let other = table.column("other")?;
    let why = table.column("why")?;
    let mut rules = Vec::new();
    for row in table.rows() {
        let classes = |column| -> Result<u32, TableError> {
            let mut bits = 0;
            for word in row.text(column).split_whitespace() {
                let class = pieces.class(word);
                let class = class.ok_or_else(|| row.fault(column, "names no class"))?;
                bits |= 1 << class;
            }
            Ok(bits)
        };
        rules.push(CountRule {
            name: row.required_text(name)?.to_owned(),
            why: row.required_text(why)?.to_owned(),
            either: classes(either)?,
            other: classes(other)?,
        });
    }
    Ok(rules)
}
