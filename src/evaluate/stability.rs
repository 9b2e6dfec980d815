//! What the rules on structures say of a candidate, alone and beside the components.

use super::Plan;
use super::component::MixtureComponent;
use super::library::Library;
use crate::chem::Molecule;
use crate::stability::{Classes, Scratch};

/// What each component can be in the built-in reactions.
pub(super) fn classes_of(library: &Library, components: &[MixtureComponent]) -> Vec<Classes> {
    let mut scratch = Scratch::new();
    components
        .iter()
        .map(|component| {
            library
                .reactions()
                .classes(&mut scratch, &component.profile.molecule)
        })
        .collect()
}

impl Plan {
    /// Broken rules, then reactions with the components, as remarks.
    pub(super) fn stability_remarks(
        &self,
        scratch: &mut Scratch,
        molecule: &Molecule,
    ) -> Vec<String> {
        let broken = self.library.rules().broken(scratch, molecule);
        let mut remarks: Vec<String> = broken.iter().map(|rule| rule.remark()).collect();
        if self.components.is_empty() {
            return remarks;
        }
        let reactions = self.library.reactions();
        let candidate = reactions.classes(scratch, molecule);
        for (at, (component, classes)) in
            (1..).zip(self.components.iter().zip(&self.component_classes))
        {
            let mut told = "";
            for reaction in reactions.between(&candidate, classes) {
                // Rows of one name say the same of relatives.
                if reaction.name != told {
                    told = &reaction.name;
                    remarks.push(format!(
                        "may react with {} (component {at}): {}",
                        component.name, reaction.reaction
                    ));
                }
            }
        }
        remarks
    }
}
