//! The oracle: a slow interpreter of rule text on big rationals, and the product compared with it over random households and
//! random small packs. The oracle reads the rule text itself (`oracle/reader.rs`, `oracle/book.rs`) and evaluates it as it reads
//! (`oracle/answer.rs`); it calls nothing of the code under test for meaning.
//!
//! Every failure prints its seed, the household and, for an invented pack, the pack. `HOURWORTH_MORE=1` asks fifty times as much.

mod answer;
mod book;
mod bound;
mod compare;
mod homes;
mod invent;
mod luck;
mod measured;
mod reader;
mod small_packs;
mod text;
mod united_kingdom;
mod worked;

/// How many times as much is asked.
fn times() -> usize {
    if std::env::var_os("HOURWORTH_MORE").is_some_and(|v| v == "1") {
        50
    } else {
        1
    }
}
