//! Why a molecule is not in the ranking of a search.

use smallvec::SmallVec;

use super::best::{score_key, score_of_key};
use super::limits::Limits;
use super::model::Job;
use super::piece::{Drawing, Pieces, Role};
use super::search::Judged;
use super::space::{
    AROMATIC, BRANCHES, CLASSES, COUNTERS, FUNCTIONAL, HALOGEN, HEAVY, NITROGEN, PIECES,
    QUATERNARY, SATURATED, kinds_of,
};
use super::state::State;
use super::structures::Drawer;
use crate::evaluate::{Profile, Profiler};
use crate::groups::{GroupCounts, SetId};

/// Pieces with their counts, ascending by place in the table.
pub(super) type Multiset = SmallVec<[(u16, u8); 12]>;

/// Structures of one assembly that are compared with the molecule.
const COMPARED: usize = 20_000;

/// The assembly that has a molecule among its structures, of all pieces, whether
/// they are on or not; `None` where pieces cannot express it.
pub fn assembly_of(
    pieces: &Pieces,
    profiler: &mut Profiler,
    library: &crate::evaluate::Library,
    profile: &Profile,
) -> Option<Multiset> {
    for (at, piece) in pieces.all.iter().enumerate() {
        if let Drawing::Molecule(smiles) = &piece.drawing {
            let known = profiler.profile(library, smiles).ok()?;
            if known.keys.constitution == profile.keys.constitution {
                return Some(SmallVec::from_slice(&[(at as u16, 1)]));
            }
        }
    }
    let mut finder = Finder {
        pieces,
        profiler,
        library,
        profile,
        drawer: Drawer::new(pieces),
        chosen: Multiset::new(),
    };
    let left = SetId::ALL.map(|set| profile.counts[set as usize].clone());
    finder.find(0, &left, profile.facts.composition.heavy_atoms())
}

struct Finder<'a> {
    pieces: &'a Pieces,
    profiler: &'a mut Profiler,
    library: &'a crate::evaluate::Library,
    profile: &'a Profile,
    drawer: Drawer<'a>,
    chosen: Multiset,
}

impl Finder<'_> {
    /// Adds pieces from `from` on whose groups are among those left.
    fn find(&mut self, from: usize, left: &[GroupCounts; 3], heavy: u16) -> Option<Multiset> {
        if heavy == 0 {
            return self.is_it().then(|| self.chosen.clone());
        }
        for at in from..self.pieces.all.len() {
            let piece = &self.pieces.all[at];
            if piece.role == Role::Whole || piece.heavy_atoms() > u32::from(heavy) {
                continue;
            }
            let mut after = left.clone();
            let mut fits = true;
            for (own, left) in piece.groups.iter().zip(&mut after) {
                let Some(own) = own else { continue };
                match without(left, own) {
                    Some(less) => *left = less,
                    None => fits = false,
                }
            }
            if !fits {
                continue;
            }
            match self.chosen.last_mut() {
                Some(last) if usize::from(last.0) == at => last.1 += 1,
                _ => self.chosen.push((at as u16, 1)),
            }
            let found = self.find(at, &after, heavy - piece.heavy_atoms() as u16);
            if found.is_some() {
                return found;
            }
            match self.chosen.last_mut() {
                Some(last) if last.1 > 1 => last.1 -= 1,
                _ => {
                    self.chosen.pop();
                }
            }
        }
        None
    }

    fn is_it(&mut self) -> bool {
        let drawn = self.drawer.structures(&self.chosen, COMPARED).drawn;
        drawn.iter().any(|smiles| {
            let known = self.profiler.profile(self.library, smiles);
            known.is_ok_and(|known| known.keys.constitution == self.profile.keys.constitution)
        })
    }
}

/// Counts less others; `None` where there are not that many.
fn without(counts: &GroupCounts, others: &GroupCounts) -> Option<GroupCounts> {
    let enough = others
        .iter()
        .all(|(number, count)| counts.count(number) >= count);
    enough.then(|| {
        counts
            .iter()
            .map(|(number, count)| (number, count - others.count(number)))
            .collect()
    })
}

/// Everything that keeps an assembly out of the best of a search, in the order in
/// which it would fall; empty where it is among them.
pub fn what_keeps_out(
    job: &Job<'_>,
    limits: &Limits,
    assembly: &Multiset,
    state: &State,
) -> Vec<String> {
    let pieces = job.pieces;
    let mut reasons = Vec::new();
    for &(at, _) in assembly {
        let piece = &pieces.all[usize::from(at)];
        if !limits.pieces[usize::from(at)] {
            reasons.push(match &piece.off {
                Some(why) => format!("the piece {} is off: {why}", piece.name),
                None => format!(
                    "the piece {} is not among the pieces of the brief",
                    piece.name
                ),
            });
        }
    }
    if !reasons.is_empty() {
        return reasons;
    }
    let members = job.members_of(assembly);
    let mut counters = [0; COUNTERS];
    for &(member, count) in &members {
        let own = &job.space.members[usize::from(member)].adds;
        for (counter, add) in counters.iter_mut().zip(own) {
            *counter += add * count;
        }
    }
    let whole = assembly
        .iter()
        .any(|one| pieces.all[usize::from(one.0)].role == Role::Whole);
    let name = |counter: usize| match counter {
        PIECES => "pieces".to_owned(),
        HEAVY => "heavy atoms".to_owned(),
        FUNCTIONAL => "functional_groups".to_owned(),
        NITROGEN => "nitrogen_atoms".to_owned(),
        HALOGEN => "halogen_atoms".to_owned(),
        BRANCHES => "branches".to_owned(),
        QUATERNARY => "quaternary_carbons".to_owned(),
        AROMATIC | SATURATED => "ring atoms".to_owned(),
        class => pieces.classes[class - CLASSES].clone(),
    };
    for (counter, (&has, &most)) in counters.iter().zip(&job.space.most).enumerate() {
        if has > most && (!whole || counter == HEAVY || counter >= CLASSES) {
            reasons.push(format!(
                "limit {}: {has}, at most {most} are allowed",
                name(counter)
            ));
        }
    }
    if !whole {
        let kinds = kinds_of(&counters);
        if kinds > job.space.kinds {
            reasons.push(format!(
                "limit functional_kinds: {kinds}, at most {} are allowed",
                job.space.kinds
            ));
        }
        for (what, has, least) in [
            ("pieces", counters[PIECES], job.space.least_pieces),
            ("heavy atoms", counters[HEAVY], job.space.least_heavy),
        ] {
            if has < least {
                reasons.push(format!(
                    "limit {what}: {has}, at least {least} are asked for"
                ));
            }
        }
    }
    if let Some(rule) = job
        .rule_that_cuts(&counters)
        .and_then(|at| job.count_rule(at))
    {
        reasons.push(format!("rule {}: {}", rule.name, rule.why));
    }
    let mass: f64 = assembly
        .iter()
        .map(|&(at, count)| {
            pieces.all[usize::from(at)]
                .composition
                .molar_mass_kg_per_mol()
                * f64::from(count)
        })
        .sum();
    if mass > limits.molar_mass_kg_per_mol {
        reasons.push(format!(
            "molar mass: {:.1} g/mol, at most {:.1} g/mol are allowed",
            mass * 1e3,
            limits.molar_mass_kg_per_mol * 1e3
        ));
    }
    if !reasons.is_empty() {
        return reasons;
    }
    match job.judge_alone(&members, [0; 4]) {
        Judged::NotAssessable => {
            reasons.push(
                "not assessable: a group or an interaction that the targets need is not published"
                    .into(),
            );
        }
        Judged::Missed { target, .. } => {
            reasons.push(format!(
                "by counts it misses {}, the error of the method considered",
                job.quick().targets[target].name
            ));
        }
        Judged::Scored { score, .. } => {
            let kept = state.best.sorted();
            let own = kept.iter().find(|one| one.pieces == *assembly);
            if own.is_none() {
                let worst = kept.last().map_or(0, |one| one.key);
                reasons.push(match score_key(score) > worst {
                    true => "its part of the search is not done".into(),
                    false => format!(
                        "by counts it scores {score:.3}; the last of the {} kept assemblies scores {:.3}",
                        kept.len(),
                        score_of_key(worst)
                    ),
                });
            }
        }
    }
    reasons
}
