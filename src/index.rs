//! Typed indices: an index into one list cannot be used in another. Imports nothing.

use std::fmt;
use std::hash::{Hash, Hasher};
use std::marker::PhantomData;

/// An index into an [`IdVec`] of `T`.
pub struct Id<T> {
    raw: u32,
    of: PhantomData<fn() -> T>,
}

impl<T> Id<T> {
    /// The index with this position.
    ///
    /// # Panics
    /// Where a list would hold more than four thousand million entries.
    pub fn new(position: usize) -> Self {
        Id {
            raw: u32::try_from(position).expect("a list is never this long"),
            of: PhantomData,
        }
    }

    /// The position in its list.
    pub fn position(self) -> usize {
        self.raw as usize
    }
}

impl<T> Clone for Id<T> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<T> Copy for Id<T> {}
impl<T> PartialEq for Id<T> {
    fn eq(&self, other: &Self) -> bool {
        self.raw == other.raw
    }
}
impl<T> Eq for Id<T> {}
impl<T> PartialOrd for Id<T> {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl<T> Ord for Id<T> {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        self.raw.cmp(&other.raw)
    }
}
impl<T> Hash for Id<T> {
    fn hash<H: Hasher>(&self, state: &mut H) {
        self.raw.hash(state);
    }
}
impl<T> fmt::Debug for Id<T> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.raw)
    }
}

/// A list whose positions are [`Id`]s.
#[derive(Clone, Debug)]
pub struct IdVec<T> {
    entries: Vec<T>,
}

impl<T> Default for IdVec<T> {
    fn default() -> Self {
        IdVec {
            entries: Vec::new(),
        }
    }
}

impl<T> IdVec<T> {
    /// An empty list.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds an entry and returns its index.
    pub fn push(&mut self, entry: T) -> Id<T> {
        self.entries.push(entry);
        Id::new(self.entries.len() - 1)
    }

    /// How many entries there are.
    pub fn len(&self) -> usize {
        self.entries.len()
    }

    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.entries.is_empty()
    }

    /// All entries, in order.
    pub fn iter(&self) -> std::slice::Iter<'_, T> {
        self.entries.iter()
    }

    /// All entries with their indices, in order.
    pub fn iter_with_id(&self) -> impl Iterator<Item = (Id<T>, &T)> {
        self.entries
            .iter()
            .enumerate()
            .map(|(position, entry)| (Id::new(position), entry))
    }
}

impl<T> std::ops::Index<Id<T>> for IdVec<T> {
    type Output = T;
    fn index(&self, id: Id<T>) -> &T {
        &self.entries[id.position()]
    }
}

impl<T> std::ops::IndexMut<Id<T>> for IdVec<T> {
    fn index_mut(&mut self, id: Id<T>) -> &mut T {
        &mut self.entries[id.position()]
    }
}
