//! How names are compared: spelling out what case, spaces and hyphens hide.

/// The form in which names are compared: lower case, without spaces, hyphens,
/// underscores and full stops; Greek letters and primes in ASCII.
///
/// Commas, digits, brackets and signs stay: `1,1-` is not `11-`, and `(+)-` is
/// not `(-)-`.
pub(super) fn folded(name: &str) -> String {
    let mut out = String::with_capacity(name.len());
    let mut previous = None;
    for letter in name.chars() {
        match letter {
            // the sign of rotation in `(-)-limonene` is not a hyphen
            '-' | '−' | '–' if previous == Some('(') => out.push('-'),
            ' ' | '\t' | '-' | '‐' | '‑' | '−' | '–' | '_' | '.' => {}
            '′' | '’' | '`' => out.push('\''),
            'α' | 'Α' => out.push_str("alpha"),
            'β' | 'Β' => out.push_str("beta"),
            'γ' | 'Γ' => out.push_str("gamma"),
            'δ' | 'Δ' => out.push_str("delta"),
            'ε' | 'Ε' => out.push_str("epsilon"),
            other => out.extend(other.to_lowercase()),
        }
        previous = Some(letter);
    }
    out
}

/// The same name with a one-letter prefix spelled out (`t-butanol`), folded,
/// where it has one.
pub(super) fn expanded(name: &str) -> Option<String> {
    let (prefix, rest) = name.trim().split_once('-')?;
    let prefix = match prefix {
        "t" => "tert",
        "s" => "sec",
        "i" => "iso",
        "n" => "",
        _ => return None,
    };
    Some(format!("{prefix}{}", folded(rest)))
}

/// Edits (insert, drop, replace, swap neighbors) between two folded names, or
/// `None` above `limit`.
///
/// Optimal string alignment over bytes.
///
/// # Complexity
///
/// Product of the lengths; used only to word an error message.
pub(super) fn distance(a: &str, b: &str, limit: usize) -> Option<usize> {
    let (a, b) = (a.as_bytes(), b.as_bytes());
    if a.len().abs_diff(b.len()) > limit {
        return None;
    }
    let mut before = vec![0; b.len() + 1];
    let mut above: Vec<usize> = (0..=b.len()).collect();
    let mut row = vec![0; b.len() + 1];
    for i in 1..=a.len() {
        row[0] = i;
        for j in 1..=b.len() {
            let replace = above[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            row[j] = replace.min(above[j] + 1).min(row[j - 1] + 1);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                row[j] = row[j].min(before[j - 2] + 1);
            }
        }
        std::mem::swap(&mut before, &mut above);
        std::mem::swap(&mut above, &mut row);
    }
    (above[b.len()] <= limit).then_some(above[b.len()])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn case_spaces_and_hyphens_do_not_matter() {
        assert_eq!(folded("Iso-Propyl  Alcohol"), "isopropylalcohol");
        assert_eq!(folded("α-Pinene"), folded("alpha pinene"));
        assert_ne!(folded("(-)-limonene"), folded("(+)-limonene"));
        assert_ne!(folded("(-)-limonene"), folded("limonene"));
        assert_ne!(folded("1,1-dichloroethane"), folded("11-dichloroethane"));
        assert_eq!(expanded("t-butanol").unwrap(), folded("tert-butanol"));
    }

    #[test]
    fn distance_counts_edits() {
        assert_eq!(distance("toluene", "tolune", 2), Some(1));
        assert_eq!(distance("toluene", "tolueen", 2), Some(1));
        assert_eq!(distance("toluene", "benzene", 2), None);
        assert_eq!(distance("", "ab", 2), Some(2));
    }
}
