//! Symmetries in words.

use crate::terms::symmetries::SignedExchange;

/// Exchanges in words. Slots that are exchanged one by one are told together, and so are two pairs.
pub(super) fn in_words(exchanges: &[SignedExchange]) -> Vec<String> {
    let mut groups: Vec<(bool, Vec<usize>)> = Vec::new();
    let mut pairs = Vec::new();
    for exchange in exchanges {
        let moved: Vec<usize> = exchange.images.iter().enumerate().filter(|(at, to)| at != *to).map(moved).collect();
        match moved.as_slice() {
            [one, two] => join(&mut groups, exchange.negative, [*one, *two]),
            [a, b, c, d] if !exchange.negative => {
                pairs.push(format!("symmetric in the pairs of slots {a} {b} and {c} {d}"));
            }
            _ => {}
        }
    }
    let words = |(negative, slots): (bool, Vec<usize>)| {
        let list: Vec<String> = slots.iter().map(usize::to_string).collect();
        format!("{} in slots {}", if negative { "antisymmetric" } else { "symmetric" }, list.join(" "))
    };
    groups.into_iter().map(words).chain(pairs).collect()
}

/// People count from 1.
fn moved((at, _): (usize, &usize)) -> usize {
    at + 1
}

/// Puts a pair into the groups; those of one sign that it touches become one, since exchanges generate a group.
fn join(groups: &mut Vec<(bool, Vec<usize>)>, negative: bool, pair: [usize; 2]) {
    let mut own = pair.to_vec();
    let mut place = None;
    let mut kept = Vec::with_capacity(groups.len() + 1);
    for (sign, slots) in groups.drain(..) {
        if sign == negative && pair.iter().any(|slot| slots.contains(slot)) {
            place.get_or_insert(kept.len());
            own.extend(slots);
        } else {
            kept.push((sign, slots));
        }
    }
    own.sort_unstable();
    own.dedup();
    kept.insert(place.unwrap_or(kept.len()), (negative, own));
    *groups = kept;
}

#[cfg(test)]
mod tests {
    use super::*;

    fn exchange(images: &[usize], negative: bool) -> SignedExchange {
        SignedExchange { images: images.to_vec(), negative }
    }

    #[test]
    fn neighbours_become_one_group() {
        let chain = [exchange(&[1, 0, 2, 3], true), exchange(&[0, 1, 3, 2], true), exchange(&[0, 2, 1, 3], true)];
        assert_eq!(in_words(&chain), ["antisymmetric in slots 1 2 3 4"]);
        let apart = [exchange(&[1, 0, 2, 3], true), exchange(&[0, 1, 3, 2], false)];
        assert_eq!(in_words(&apart), ["antisymmetric in slots 1 2", "symmetric in slots 3 4"]);
    }

    #[test]
    fn pairs_are_exchanged_whole() {
        let pairs = [exchange(&[2, 3, 0, 1], false)];
        assert_eq!(in_words(&pairs), ["symmetric in the pairs of slots 1 2 and 3 4"]);
        assert_eq!(in_words(&[]), [""; 0]);
    }
}
