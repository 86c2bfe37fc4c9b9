//! The sizes of the index families of a world in one dimension, which base variables they are, and how the
//! members of one lie among those of another.

use crate::expression::{Index, Size, World};
use crate::trouble::{Outcome, Trouble};

/// The families of a world in one dimension.
#[derive(Clone, Debug)]
pub(crate) struct Families {
    /// How many members each has, nothing if there are none in this dimension.
    sizes: Vec<Option<usize>>,
    coordinates: Vec<Option<usize>>,
    metrics: Vec<Option<usize>>,
}

impl Families {
    pub fn new(world: &World, dimension: usize) -> Self {
        let size = |size: Size| match size {
            Size::Fixed(size) => Some(size),
            Size::Dimension(less) => dimension.checked_sub(less),
        };
        Self {
            sizes: world.families.iter().map(|family| size(family.size).filter(|size| *size > 0)).collect(),
            coordinates: world.families.iter().map(|family| family.coordinates).collect(),
            metrics: world.families.iter().map(|family| family.metric).collect(),
        }
    }

    /// How many base variables all of them need.
    pub fn variables(&self) -> usize {
        let ends = self
            .sizes
            .iter()
            .zip(&self.coordinates)
            .map(|(size, first)| first.map_or(0, |first| first.saturating_add(size.unwrap_or_default())));
        ends.max().unwrap_or_default()
    }

    /// How many members a family has; `Dimension` if none in this one.
    pub fn size(&self, family: usize) -> Outcome<usize> {
        self.sizes.get(family).ok_or(Trouble::Shape)?.ok_or(Trouble::Dimension)
    }

    /// The base variable that is the first member.
    pub fn first(&self, family: usize) -> Option<usize> {
        self.coordinates.get(family).copied().flatten()
    }

    /// The metric that moves the indices of a family.
    pub fn metric(&self, family: usize) -> Option<usize> {
        self.metrics.get(family).copied().flatten()
    }

    /// Where the members of `part` stand among those of `whole`: from which on, and how many.
    /// `Shape` if they are not among them.
    pub fn range(&self, part: usize, whole: usize) -> Outcome<(usize, usize)> {
        let (count, all) = (self.size(part)?, self.size(whole)?);
        let from = match (self.first(part), self.first(whole)) {
            _ if part == whole => 0,
            (Some(own), Some(first)) => own.checked_sub(first).ok_or(Trouble::Shape)?,
            _ if count == all => 0,
            _ => return Err(Trouble::Shape),
        };
        if from + count > all { Err(Trouble::Shape) } else { Ok((from, count)) }
    }

    /// The larger of two families.
    pub fn larger(&self, a: usize, b: usize) -> usize {
        let size = |family: usize| self.sizes.get(family).copied().flatten();
        if size(b) > size(a) { b } else { a }
    }

    /// The definitions that define components of the same: of one name, with the same levels. Ascending; the
    /// first stands for all.
    pub fn group(world: &World, definition: usize) -> Vec<usize> {
        let Some(own) = world.definitions.get(definition) else { return Vec::new() };
        let levels = |free: &[Index]| free.iter().map(|index| index.level).collect::<Vec<_>>();
        let wanted = levels(&own.free);
        let alike = world.definitions.iter().enumerate();
        alike.filter(|(_, other)| other.name == own.name && levels(&other.free) == wanted).map(|(i, _)| i).collect()
    }
}
