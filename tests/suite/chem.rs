//! Molecules: reading, valence, rings, aromaticity, identity.

use groupsmith::chem::{BondOrder, Molecule};

fn read(text: &str) -> Molecule {
    Molecule::from_smiles(text).unwrap_or_else(|error| panic!("{text}: {error}"))
}

fn formula(text: &str) -> String {
    read(text).composition().to_string()
}

fn aromatic_atoms(text: &str) -> usize {
    read(text).atoms().iter().filter(|a| a.aromatic).count()
}

#[test]
fn hydrogens_follow_the_valence() {
    for (text, expected) in [
        ("C", "CH4"),
        ("[H][H]", "H2"),
        ("[HH]", "H2"),
        ("O", "H2O"),
        ("[2H]O[2H]", "H2O"),
        ("[H]OC", "CH4O"),
        ("C#N", "CHN"),
        ("CS(C)=O", "C2H6OS"),
        ("CS(=O)(=O)C", "C2H6O2S"),
        ("COP(=O)(OC)OC", "C3H9O4P"),
        ("c1cc[nH]c1", "C4H5N"),
        ("c1ccncc1", "C5H5N"),
        ("c1ccsc1", "C4H4S"),
        ("C[Si](C)(C)O[Si](C)(C)C", "C6H18OSi2"),
        ("CB(O)O", "CH5BO2"),
        ("FS(F)(F)(F)(F)F", "F6S"),
        ("ClCCl", "CH2Cl2"),
        ("C[NH3+].[Cl-]", ""),
        ("C[N+](=O)[O-]", "CH3NO2"),
        ("[C-]#[O+]", "CO"),
        ("N(=O)O", "HNO2"),
        ("BrBr", "Br2"),
    ] {
        if expected.is_empty() {
            assert!(Molecule::from_smiles(text).is_err());
        } else {
            assert_eq!(formula(text), expected, "{text}");
        }
    }
}

#[test]
fn rings_and_aromatic_atoms() {
    for (text, rings, aromatic) in [
        ("c1ccccc1", 1, 6),
        ("C1=CC=CC=C1", 1, 6),
        ("c1ccc2ccccc2c1", 2, 10),
        ("C1=CC=C2C=CC=CC2=C1", 2, 10),
        ("c1ccc2cccc2cc1", 2, 10),
        ("C1=CC=CC=CC=C1", 1, 0),
        ("O=C1C=CC(=O)C=C1", 1, 0),
        ("O=c1cc[nH]cc1", 1, 6),
        ("C1CC1", 1, 0),
        ("C12C3C4C1C5C2C3C45", 5, 0),
        ("c1ccc2c(c1)Cc1ccccc1-2", 3, 12),
        ("c1ccc(-c2ccccc2)cc1", 2, 12),
        ("C1=CC2=CC=CC=C2C=C1", 2, 10),
        ("O=C1OC(=O)C=C1", 1, 0),
    ] {
        let molecule = read(text);
        assert_eq!(molecule.ring_count(), rings, "{text}");
        assert_eq!(aromatic_atoms(text), aromatic, "{text}");
    }
}

#[test]
fn orders_follow_the_model() {
    let toluene = read("CC1=CC=CC=C1");
    let orders: Vec<BondOrder> = toluene.bonds().iter().map(|bond| bond.order).collect();
    assert_eq!(orders[0], BondOrder::Single);
    assert!(
        orders[1..]
            .iter()
            .all(|&order| order == BondOrder::Aromatic)
    );
    assert_eq!(toluene.atoms()[1].ring_sizes, 1 << 6);
    assert_eq!(toluene.neighbors(0).len(), 1);
}

#[test]
fn refusals_name_column_and_reason() {
    for (text, column, reason) in [
        ("", 1, "empty"),
        ("C*", 2, "wildcard"),
        ("CC[*]", 3, "wildcard"),
        ("CN(C)(C)C", 2, "impossible-valence"),
        ("CC(C)(C)(C)C", 2, "impossible-valence"),
        ("CO(C)C", 2, "impossible-valence"),
        ("C1CC", 2, "open-ring-bond"),
        ("C11", 3, "self-ring-bond"),
        ("C12CC12", 6, "doubled-ring-bond"),
        ("C1C1", 4, "doubled-ring-bond"),
        ("C=1CC#1", 7, "ring-bond-order"),
        ("c1cccc1", 1, "no-kekule-form"),
        ("c1ccccccc1", 1, "ambiguous-kekule-form"),
        ("cc", 1, "aromatic-outside-ring"),
        ("C[NH3+]", 2, "net-charge"),
        ("C[CH2]", 2, "radical"),
        ("[O]", 1, "radical"),
        ("[H]", 1, "radical"),
        ("CC.O", 4, "several-components"),
        ("C[Se]C", 2, "unsupported-element"),
        ("[Na+].[Cl-]", 1, "unsupported-element"),
        ("C$C", 3, "quadruple-bond"),
        ("C[15C]", 2, "unsupported-isotope"),
        ("CC(", 4, "syntax"),
        ("CC)", 3, "syntax"),
        ("C[C", 4, "syntax"),
        ("C C", 2, "syntax"),
        ("CX", 2, "syntax"),
        ("C%1C", 4, "syntax"),
        ("F/C(/Cl)=C/F", 2, "contradicting-directions"),
        ("OCl(=O)(=O)=O", 2, "impossible-valence"),
    ] {
        let error = Molecule::from_smiles(text).expect_err(text);
        assert_eq!(error.reason(), reason, "{text}: {error}");
        assert_eq!(error.column, column, "{text}: {error}");
    }
    let sentence = Molecule::from_smiles("CN(C)(C)C").unwrap_err().to_string();
    assert_eq!(
        sentence,
        "column 2: nitrogen with 4 bonds and no charge is not a possible valence"
    );
}
