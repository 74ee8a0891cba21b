//! The only reader of the disk: rule packs, case lists, templates and office files, each with its SHA-256.
//!
//! In: paths. Out: texts in memory and readers over tables. Refuses what is not there, is not UTF-8 or
//! lacks what it must hold. Imports `rules`, `case`, `diag`, `source`.

mod checked;
mod error;
mod examples;
mod files;
mod list;
mod local;
mod office;
mod pack;
mod templates;
mod terms;

pub use checked::{check_pack, schema_of};
pub use error::Error;
pub use examples::{Asks, Case, Example, Expect, What, read_examples};
pub use files::{Files, TextFile, hash_file, hex, read_folder, read_text};
pub use list::{CaseList, LIST_FILE, Readings, Rows, Sorting, Survey};
pub use local::{LOCAL, lay_local};
pub use office::{HoldRules, Office, OfficeFile, parse_office, read_office};
pub use pack::{PACK_FILE, PackFiles, built_in_packs, read_pack, read_pack_folder};
pub use templates::read_templates;
pub use terms::{Terms, terms_of};
