//! The commands and their options, with their help. In: arguments. Out: a request that clap has checked.

use crate::statement::Kind;
use chrono::NaiveDate;
use clap::{Args, Parser, Subcommand, ValueEnum};
use std::path::PathBuf;

/// What an hour is worth: works out what each household of a case list keeps when somebody works more hours, takes an
/// offer or gets a rise, and prints one statement per household.
#[derive(Debug, Parser)]
#[command(name = "hourworth", version, after_help = EXAMPLES, max_term_width = 100)]
pub struct Cli {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

const EXAMPLES: &str = "\
Examples:
  hourworth form uk --to cases           write blank input files
  hourworth vet cases                    check a case list, print every fault
  hourworth show cases --household HA-01 look at one household
  hourworth print cases --to statements  print a statement for every household

Exit status:
  0  done; the run balances
  1  done, but households were rejected; or faults were found; or examples failed
  2  the request could not be carried out
  3  interrupted

It informs, it never advises. Every figure is an estimate at a date; the office that administers the rules decides.";

/// The commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Print one statement for every household of a case list
    Print(PrintArgs),
    /// Show one household on the terminal: table, turning points, a small chart
    Show(ShowArgs),
    /// Show every step of the working at one number of hours
    Working(WorkingArgs),
    /// Check case lists, rule packs, local files, templates and office files, and print every fault
    Vet(VetArgs),
    /// Run the published examples of a rule pack
    Prove(ProveArgs),
    /// Write blank input files for a rule pack
    Form(FormArgs),
    /// Serve a run as one of its workers
    #[command(hide = true)]
    Worker,
}

/// Where rules come from.
#[derive(Debug, Args)]
pub struct RulesArgs {
    /// Rule pack to use instead of the one that the list names: a built-in name or a folder
    #[arg(long, value_name = "PACK")]
    pub rules: Option<String>,
    #[command(flatten)]
    pub laid: LocalArgs,
}

/// Local files.
#[derive(Debug, Args)]
pub struct LocalArgs {
    /// Local file to lay over the rule pack: a council's scheme or an allowance table; may be given several times
    #[arg(long, value_name = "FILE")]
    pub local: Vec<PathBuf>,
}

/// `hourworth print`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth print cases --to run-april
  hourworth print cases --to run-april --zip run-april.zip --workers 4
  hourworth print cases --to run-april --replace --allow-rejects
  hourworth print cases --to run-april --kind client,caseworker

The folder gets:
  statements/          one PDF per household and kind, named by its reference
  results.csv          what each household has at its hours and offers
  turning_points.csv   where the next hour changes what is kept
  held.csv             households that were not printed on purpose, with the reasons
  rejects.csv          households with faults, with every fault
  statements.csv       number, file and hash of every statement
  run.json             what went in, and the balance: households = printed + held + rejected
  timings.json         how long it took

Folders and files are readable by their owner only. Cells of text that a spreadsheet would take for a
formula have an apostrophe in front.")]
pub struct PrintArgs {
    /// Folder of a case list, or one household as a TOML file
    pub list: PathBuf,
    /// Folder for the run: new, empty, or an earlier run with --replace
    #[arg(long, value_name = "FOLDER")]
    pub to: PathBuf,
    /// Also put all outputs into one ZIP file
    #[arg(long, value_name = "FILE")]
    pub zip: Option<PathBuf>,
    #[command(flatten)]
    pub rules: RulesArgs,
    /// Folder of templates to use instead of the built-in ones
    #[arg(long, value_name = "FOLDER")]
    pub templates: Option<PathBuf>,
    /// Office file: letterhead and what is held back
    #[arg(long, value_name = "FILE")]
    pub office: Option<PathBuf>,
    /// Issue date of the statements; today unless given
    #[arg(long, value_name = "YYYY-MM-DD")]
    pub issued: Option<NaiveDate>,
    /// Write every hour of the grid to results.csv
    #[arg(long)]
    pub grid: bool,
    /// Kinds of statement, with commas between: client (the letter to the household), payroll (a page an employee),
    /// caseworker (the file copy with every working)
    #[arg(long, value_name = "KINDS", value_delimiter = ',', default_value = "client", value_parser = kind)]
    pub kind: Vec<Kind>,
    /// Payroll pages also show what the employer pays on top, where the rules hold it
    #[arg(long)]
    pub employer_cost: bool,
    /// Write tables only, no statements
    #[arg(long)]
    pub no_statements: bool,
    /// End with status 0 even where households were rejected
    #[arg(long)]
    pub allow_rejects: bool,
    /// Remove an earlier run in the folder, then print anew
    #[arg(long)]
    pub replace: bool,
    /// How many worker processes; one for each processor unless given
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=256))]
    pub workers: Option<u16>,
    /// Seconds that one household may take
    #[arg(long, value_name = "SECONDS", default_value_t = 60, value_parser = clap::value_parser!(u32).range(1..=86_400))]
    pub deadline: u32,
    /// Megabytes of address space that one worker may use (Unix only)
    #[arg(long, value_name = "MB", default_value_t = 2048, value_parser = clap::value_parser!(u64).range(64..=1_048_576))]
    pub memory: u64,
}

/// Form of what is printed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum Format {
    /// For people.
    #[default]
    Text,
    /// For programs.
    Json,
}

/// One household of a list.
#[derive(Debug, Args)]
pub struct OneArgs {
    /// Folder of a case list, or one household as a TOML file
    pub list: PathBuf,
    /// Reference of the household
    #[arg(long, value_name = "REF")]
    pub household: String,
    #[command(flatten)]
    pub rules: RulesArgs,
    /// Text for people or JSON for programs
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
}

/// `hourworth show`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth show cases --household HA-01
  hourworth show cases --household HA-01 --format json")]
pub struct ShowArgs {
    #[command(flatten)]
    pub one: OneArgs,
}

/// `hourworth working`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth working cases --household HA-01 --hours 16
  hourworth working cases --household HA-01 --hours 22.5 --earner 2 --offer shift
  hourworth working cases --household HA-01 --hours 16 --settled")]
pub struct WorkingArgs {
    #[command(flatten)]
    pub one: OneArgs,
    /// Hours a week of the earner, with up to two decimals
    #[arg(long, value_name = "H", value_parser = hours)]
    pub hours: crate::num::Hours,
    /// Which adult's hours: 1 for the first, 2 for the second
    #[arg(long, value_name = "N", default_value_t = 1, value_parser = clap::value_parser!(u8).range(1..=9))]
    pub earner: u8,
    /// Reference of an offer whose terms are used; today's job unless given
    #[arg(long, value_name = "REF")]
    pub offer: Option<String>,
    /// Work it out as it will be once facts about past periods have settled
    #[arg(long)]
    pub settled: bool,
}

/// `hourworth vet`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth vet cases
  hourworth vet rules/uk office.toml
  hourworth vet harrowmere.toml --rules rules/uk")]
pub struct VetArgs {
    /// Case lists, rule packs (folder or built-in name), local files, template folders, office files
    #[arg(required = true, value_name = "PATH")]
    pub paths: Vec<PathBuf>,
    #[command(flatten)]
    pub rules: RulesArgs,
}

/// `hourworth prove`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth prove uk
  hourworth prove rules/uk")]
pub struct ProveArgs {
    /// Rule pack: a built-in name or a folder
    pub pack: String,
    #[command(flatten)]
    pub laid: LocalArgs,
    /// Text for people or JSON for programs, one object a line
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
}

/// `hourworth form`.
#[derive(Debug, Args)]
#[command(after_help = "\
Examples:
  hourworth form uk --to cases")]
pub struct FormArgs {
    /// Rule pack: a built-in name or a folder
    pub pack: String,
    #[command(flatten)]
    pub laid: LocalArgs,
    /// Folder for the files; a file that is there already is never overwritten
    #[arg(long, value_name = "FOLDER")]
    pub to: PathBuf,
}

/// A kind of statement.
fn kind(word: &str) -> Result<Kind, String> {
    let words: Vec<&str> = Kind::ALL.iter().map(|kind| kind.word()).collect();
    Kind::from_word(word)
        .ok_or_else(|| format!("found `{word}`, expected one of {}", words.join(", ")))
}

/// Hours a week with up to two decimals.
fn hours(text: &str) -> Result<crate::num::Hours, String> {
    let expected = || format!("found `{text}`, expected hours from 0 to 168 such as 16 or 22.5");
    let (whole, part) = text.split_once('.').unwrap_or((text, ""));
    let digits = |text: &str| text.bytes().all(|byte| byte.is_ascii_digit());
    if whole.is_empty() || whole.len() > 3 || part.len() > 2 || !digits(whole) || !digits(part) {
        return Err(expected());
    }
    let hundredths: i64 = format!("{whole}{part:0<2}")
        .parse()
        .map_err(|_| expected())?;
    if hundredths > 16_800 {
        return Err(expected());
    }
    Ok(crate::num::Hours(hundredths))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::num::Hours;
    use clap::CommandFactory;

    #[test]
    fn the_commands_are_sound() {
        Cli::command().debug_assert();
    }

    #[test]
    fn hours_have_up_to_two_decimals() {
        let good = |text, wanted| assert_eq!(hours(text), Ok(Hours(wanted)), "{text}");
        good("0", 0);
        good("16", 1600);
        good("22.5", 2250);
        good("37.25", 3725);
        good("168", 16_800);
        for bad in ["", ".5", "168.01", "-1", "1.234", "1,5", "x", "9999"] {
            assert!(hours(bad).is_err(), "{bad}");
        }
    }
}
