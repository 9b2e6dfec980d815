//! What the search knows of each piece and each target: linear sums with their
//! limits, closing functions, activity.

use smallvec::SmallVec;
use thiserror::Error;

use super::account::Account;
use super::limits::Limits;
use super::piece::{Pieces, Role};
use super::search::{Judged, rarity_bucket, rarity_of};
use super::space::{CLASSES, Counters, Space};
use crate::chem::Composition;
use crate::evaluate::{Quick, QuickFigure};
use crate::groups::{GroupCounts, SetId};
use crate::mixture::{Component, KeysAtTemperature, Unifac};
use crate::numeric::{NORMAL_90, normal_cdf};
use crate::pure::fitted::{ClassCounts, CountModel, Fitted, Known, Quantity};
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
}

impl Form<'_> {
    /// Lowest and highest value of the form, rounded outward.
    pub(super) fn limits(&self, n: f64, classes: &ClassCounts, rarity: f64) -> (i64, i64) {
        // the mass is a sum over pieces, not a mean over atoms
        let scale = if self.model.is_some() { n } else { 1.0 };
        let (mut low, mut high) = (self.low * scale, self.high * scale);
        if let Some(model) = &self.model {
            let (by_count, by_share) = model.products(classes);
            let fixed = n * (model.size(n) + by_count) + by_share;
            let wide = n * self.reach * model.half_width(n, rarity, classes, None);
            low -= fixed + wide;
            high -= fixed - wide;
        }
        let slack = ROUNDING;
        let whole = |value: f64| value.clamp(-9.0e18, 9.0e18) as i64;
        (
            whole((low * UNITS - slack).floor()),
            whole((high * UNITS + slack).ceil()),
        )
    }
}

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
    pub(super) measures: Vec<Measures>,
    /// Functional chain pieces, places in the space.
    pub(super) functional: Vec<usize>,
    /// CH3, CH2, CH, C: places in the space.
    pub(super) tail: [Option<usize>; 4],
    pub(super) tail_rarity: f64,
    pub(super) most_mass: i64,
    pub(super) largest: u8,
    rules: Vec<CountRule>,
    models: Vec<CountModel<'j>>,
    activity: Option<(&'j Unifac, SetId, &'j KeysAtTemperature)>,
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
            tail_rarity: 0.0,
            most_mass: (limits.molar_mass_kg_per_mol * MASS_UNITS).floor() as i64,
            largest: u8::try_from(limits.heavy_atoms.1).unwrap_or(u8::MAX),
            rules: read_rules(pieces)?,
            measures: Vec::new(),
            space,
            quick,
            forms: Vec::new(),
            models,
            activity,
            reach,
        };
        let members = job.space.members.iter();
        job.measures = members
            .map(|member| job.measure(usize::from(member.piece), fitted, &forms, must_activity))
            .collect();
        job.forms = forms;
        let tail = job.tail.iter().flatten();
        job.tail_rarity = tail.map(|&at| job.measures[at].rarity).sum();
        Ok(job)
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
        let needs = |quantity: Quantity| {
            let asked = self.quick.targets.iter().any(|target| {
                target.must
                    && match target.figure {
                        QuickFigure::Fitted(own) => {
                            own == quantity
                                || matches!(
                                    quantity,
                                    Quantity::BoilingPoint | Quantity::MolarVolume
                                ) && !matches!(
                                    own,
                                    Quantity::BoilingPoint
                                        | Quantity::MolarVolume
                                        | Quantity::MeltingPoint
                                        | Quantity::LogPOctanolWater
                                        | Quantity::IdealGasEnthalpyOfFormation
                                )
                        }
                        QuickFigure::Density => quantity == Quantity::MolarVolume,
                        _ => false,
                    }
            });
            asked
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
            gap: new_kind || must_activity && groups.is_none(),
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

    /// Whether an interaction that the activity needs is not published.
    pub(super) fn has_gap(&self, members: &[(u16, u8)], tail: &[u8; 4]) -> bool {
        let Some((_, _, keys)) = self.activity else {
            return false;
        };
        match self.component(members, tail) {
            Some(component) => keys.ln_gamma_inf(&component, &mut [0.0; 2]).is_err(),
            // nothing yet: what is added decides
            None => false,
        }
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

    /// Figures and score of an assembly.
    pub(super) fn judge(&self, members: &[(u16, u8)], tail: [u8; 4]) -> Judged {
        let mut whole = Whole::new(self, members, &tail);
        let mut activity = None;
        let (mut sum, mut weights) = (0.0, 0.0);
        for (at, target) in self.quick.targets.iter().enumerate() {
            let value = match target.figure {
                QuickFigure::Dear => continue,
                QuickFigure::MolarMass => Some((whole.mass, None)),
                QuickFigure::Density => whole.density(),
                QuickFigure::Fitted(quantity) => whole.fitted(quantity),
                QuickFigure::OfKey { .. } | QuickFigure::OfKeys { .. } => {
                    let known = activity.get_or_insert_with(|| self.activity_of(members, &tail));
                    known.as_ref().and_then(|(_, ln_gamma)| {
                        of_activity(target.figure, *ln_gamma, whole.mass).map(|value| (value, None))
                    })
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
                let may = match (&activity, ends) {
                    (_, Some((least, most))) => most >= low && least <= high,
                    (Some(Some((component, ln_gamma))), None) => {
                        self.quick.may_meet(at, component, *ln_gamma, value)
                    }
                    _ => false,
                };
                if !may {
                    let by_bound = self.forms.iter().any(|form| form.target == at);
                    return Judged::Missed {
                        target: at,
                        by_bound,
                    };
                }
            }
            if target.weight > 0.0 {
                weights += target.weight;
                sum += target.weight * target.want.desirability(value).ln();
            }
        }
        Judged::Scored(if weights > 0.0 {
            (sum / weights).exp()
        } else {
            1.0
        })
    }

    fn activity_of(&self, members: &[(u16, u8)], tail: &[u8; 4]) -> Option<(Component, [f64; 2])> {
        let (_, _, keys) = self.activity?;
        let component = self.component(members, tail)?;
        let mut ln_gamma = [0.0; 2];
        keys.ln_gamma_inf(&component, &mut ln_gamma).ok()?;
        let plausible = crate::data::pairs::PLAUSIBLE_LN_GAMMA_INFINITY;
        ln_gamma
            .iter()
            .all(|value| plausible.contains(value))
            .then_some((component, ln_gamma))
    }
}

fn of_activity(figure: QuickFigure, ln_gamma: [f64; 2], mass: f64) -> Option<f64> {
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
        let half = self.job.reach * model.half_width(self.n, rarity, &self.classes, Some(sum));
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
                if quantity
                    .terms(crate::pure::fitted::Level::Count)
                    .rests_on_others
                {
                    known?;
                }
                self.closed(at, known)
            }
        };
        found.map(|(value, ends)| (value, Some(ends)))
    }

    fn density(&mut self) -> Option<(f64, Option<(f64, f64)>)> {
        let (volume, (low, high)) = self.known[MOLAR_VOLUME]?;
        let of = |volume: f64| self.mass / volume;
        Some((
            of(volume),
            Some((of(high), if low > 0.0 { of(low) } else { f64::MAX })),
        ))
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
                });
            }
            QuickFigure::Density => {
                let mut one = |density: f64, low: f64, high: f64| {
                    if density.is_finite() && density > 0.0 {
                        forms.push(Form {
                            target: at,
                            model: model(Quantity::MolarVolume),
                            density: Some(density),
                            low,
                            high,
                            reach,
                        });
                    }
                };
                // n·sum of the volume less mass over density: below 0 where denser
                one(low, f64::NEG_INFINITY, 0.0);
                one(high, 0.0, f64::INFINITY);
            }
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
