//! Walking an array in another order of its slots: for each component of the result, where it stands in the
//! source. Permutations, diagonals and fixed components are all of this form, each result slot having a step.
//!
//! The one idea: slots whose neighbours follow each other in the source, too, are one slot (`Walk`), so that most of a
//! walk is a few long runs of equal steps.

use crate::number::Number;

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
    let mut places = Vec::with_capacity(lengths.iter().product());
    places.push(0);
    // From the last slot on: what stands there is repeated for each index of the slot before.
    for (length, step) in lengths.iter().zip(steps).rev() {
        let count = places.len();
        for index in 1..*length {
            places.extend_from_within(..count);
            places.iter_mut().skip(index * count).for_each(|place| *place += index * step);
        }
    }
    places
}

/// A walk over an array: runs of one length and one step.
pub(crate) struct Walk {
    starts: Vec<usize>,
    length: usize,
    step: usize,
}

impl Walk {
    /// The walk over all components, in row-major order of slots with these lengths and positive steps.
    pub fn new(lengths: &[usize], steps: &[usize]) -> Self {
        let (mut merged_lengths, mut merged_steps): (Vec<usize>, Vec<usize>) = (Vec::new(), Vec::new());
        for (length, step) in lengths.iter().zip(steps).filter(|(length, _)| **length != 1) {
            match (merged_lengths.last_mut(), merged_steps.last_mut()) {
                (Some(outer_length), Some(outer_step)) if *outer_step == step * length => {
                    *outer_length *= length;
                    *outer_step = *step;
                }
                _ => {
                    merged_lengths.push(*length);
                    merged_steps.push(*step);
                }
            }
        }
        let (length, step) = (merged_lengths.pop().unwrap_or(1), merged_steps.pop().unwrap_or(1));
        Self { starts: places(&merged_lengths, &merged_steps), length, step: step.max(1) }
    }

    /// Appends the components that the walk finds in a block, beginning at a place of it.
    pub fn gather<N: Number>(&self, block: &[N], from: usize, result: &mut Vec<N>) {
        for start in &self.starts {
            let run = block.get(from + start..).unwrap_or_default();
            if self.step == 1 {
                result.extend_from_slice(run.get(..self.length).unwrap_or_default());
            } else {
                result.extend(run.iter().step_by(self.step).take(self.length));
            }
        }
    }

    /// Adds to as many sums the components that the walk finds in a block, beginning at a place of it.
    pub fn add<N: Number>(&self, block: &[N], from: usize, sums: &mut [N]) {
        for (start, sums) in self.starts.iter().zip(sums.chunks_mut(self.length.max(1))) {
            let run = block.get(from + start..).unwrap_or_default().iter().step_by(self.step);
            sums.iter_mut().zip(run).for_each(|(sum, number)| *sum = *sum + *number);
        }
    }
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
