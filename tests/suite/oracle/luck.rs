//! A small source of chance with a seed, so that every failure can be made again from one number.

/// Chance from a seed (splitmix64).
#[derive(Clone, Debug)]
pub struct Luck(u64);

impl Luck {
    pub fn new(seed: u64) -> Luck {
        Luck(seed)
    }

    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// A position among so many.
    pub fn below(&mut self, many: usize) -> usize {
        usize::try_from(self.next() % (many.max(1) as u64)).expect("a position")
    }

    /// A whole number from `low` to `high`, both included.
    pub fn between(&mut self, low: i64, high: i64) -> i64 {
        let span = u64::try_from(i128::from(high) - i128::from(low) + 1).unwrap_or(u64::MAX);
        i64::try_from(i128::from(low) + i128::from(self.next() % span)).expect("it lies between")
    }

    /// True in so many of a hundred cases.
    pub fn percent(&mut self, chance: usize) -> bool {
        self.below(100) < chance
    }

    /// One of a list.
    pub fn pick<'l, T>(&mut self, list: &'l [T]) -> &'l T {
        &list[self.below(list.len())]
    }
}
