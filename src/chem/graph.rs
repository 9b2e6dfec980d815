//! The petgraph form of a molecule; its types stay inside `chem`.

use petgraph::algo::maximum_matching;
use petgraph::graph::{NodeIndex, UnGraph};

use super::smiles::NONE;
use super::{Atom, Bond, Molecule};

impl Molecule {
    /// The molecule as an undirected graph; node and edge indices are those of
    /// [`Molecule::atoms`] and [`Molecule::bonds`].
    pub(crate) fn graph(&self) -> UnGraph<Atom, Bond> {
        let mut graph = UnGraph::with_capacity(self.atoms.len(), self.bonds.len());
        for &atom in &self.atoms {
            graph.add_node(atom);
        }
        for &bond in &self.bonds {
            let [a, b] = bond.atoms.map(|atom| NodeIndex::new(atom as usize));
            graph.add_edge(a, b, bond);
        }
        graph
    }
}

/// Pairs all `members` along the bonds that `may_pair` lets pass; the partner
/// and bond of each atom, or the first atom that stays alone.
///
/// Edmonds' maximum matching: exact, and slower than a greedy pairing.
pub(super) fn pair_all(
    molecule: &Molecule,
    members: &[bool],
    may_pair: impl Fn(usize, &Bond) -> bool,
) -> Result<Vec<(u32, u32)>, u32> {
    let graph = molecule.graph().filter_map(
        |node, _| members[node.index()].then_some(node.index() as u32),
        |edge, bond| may_pair(edge.index(), bond).then_some(edge.index() as u32),
    );
    let matching = maximum_matching(&graph);
    let mut partners = vec![(NONE, NONE); members.len()];
    for node in graph.node_indices() {
        let atom = graph[node];
        let Some(mate) = matching.mate(node) else {
            return Err(atom);
        };
        let edge = graph
            .find_edge(node, mate)
            .expect("a matched pair is bonded");
        partners[atom as usize] = (graph[mate], graph[edge]);
    }
    Ok(partners)
}
