//! What a file copy and a payroll page need besides the assessment: workings at points, and where the rules come from.

use crate::measures::WorkingLine;
use crate::num::Hours;
use chrono::NaiveDate;

/// Workings and the record of the rules.
#[derive(Clone, Debug, Default)]
pub struct Evidence {
    /// Workings, in the order in which their columns stand: for each earner not in work and each offer, today once for the household.
    pub points: Vec<WorkedPoint>,
    /// Where the rules come from.
    pub rules: RulesRecord,
}

/// The working of one point.
#[derive(Clone, Debug)]
pub struct WorkedPoint {
    /// Position of the earner among the adults.
    pub adult: usize,
    /// The earner's job as the working names it: `job 2`.
    pub job: String,
    /// Which point it is.
    pub place: PointPlace,
    /// Every figure and item in the order of the law.
    pub lines: Vec<WorkingLine>,
}

/// Which point a working belongs to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PointPlace {
    /// The earner's only job ended.
    NotInWork,
    /// Today's hours.
    Today,
    /// The hours of an offer: position of its line among the earner's.
    Offer(usize),
    /// More hours on today's terms: the hours.
    More(Hours),
}

/// Where the rules of a run come from.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct RulesRecord {
    /// The pack's name: built in, or its folder's.
    pub name: String,
    /// SHA-256 over the list of the pack's files with their own hashes, in hexadecimal.
    pub hash: String,
    /// First day that the pack covers.
    pub from: NaiveDate,
    /// What each of the pack's dates is, and the day that this run took.
    pub dates: Vec<(String, NaiveDate)>,
    /// Conversions and bands as they stand in the pack: name and text.
    pub steps: Vec<(String, String)>,
    /// Version of this program.
    pub version: String,
}
