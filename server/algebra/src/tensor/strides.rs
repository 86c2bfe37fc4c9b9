//! Walking an array in another order of its slots: for each component of the result, where it stands in the
//! source. Permutations, diagonals and fixed components are all of this form, each result slot having a step.

/// The steps of the slots of a row-major array: how far apart two neighbours in a slot stand.
pub(crate) fn strides(lengths: &[usize]) -> Vec<usize> {
    let mut strides: Vec<usize> = lengths
        .iter()
        .rev()
        .scan(1, |step, length| {
            let own = *step;
            *step *= length;
            Some(own)
        })
        .collect();
    strides.reverse();
    strides
}

/// The places in the source of all components, in row-major order of slots with these lengths and steps.
pub(crate) fn places(lengths: &[usize], steps: &[usize]) -> Vec<usize> {
    let mut places = vec![0];
    for (length, step) in lengths.iter().zip(steps) {
        places = places.iter().flat_map(|place| (0..*length).map(move |index| place + index * step)).collect();
    }
    places
}

/// The place of a component; nothing out of bounds.
pub(crate) fn place(lengths: &[usize], component: &[usize]) -> Option<usize> {
    if lengths.len() != component.len() || component.iter().zip(lengths).any(|(index, length)| index >= length) {
        return None;
    }
    Some(component.iter().zip(lengths).fold(0, |place, (index, length)| place * length + index))
}

/// The component at a place.
pub(crate) fn component(lengths: &[usize], place: usize) -> Vec<usize> {
    let steps = strides(lengths);
    lengths.iter().zip(steps).map(|(length, step)| place / step % length).collect()
}
