//! The table of a payroll page: basic pay, premium pay, what is given up, each deduction, what reaches the person; for a pay period and a year.

use super::Page;
use crate::measures::{BudgetLine, ItemKind, Point};
use crate::num::{Direction, Fraction, Hours, Money, divide_rounded};
use crate::statement::build::steps::Step;
use crate::statement::build::words::hours_text;
use crate::statement::error::StatementError;
use crate::statement::fonts::{Weight, width};
use crate::statement::money::{NONE, capital, money};
use crate::statement::pay_view::{PayGroup, PayTable};
use crate::statement::view::{Column, Line, Row, RowWeight};

/// The fact of a job that says after how many hours a premium is paid, and the one that says what is paid an hour beyond them.
pub(super) const PREMIUM: (&str, &str) = ("premium_after", "premium_wage");
/// The fact of a job that says how the pension payment is made, and its word for pay that the contract gives up.
pub(super) const SACRIFICE: (&str, &str) = ("pension_method", "salary_sacrifice");
/// The fact of a job that says how often the pay is paid.
pub(super) const FREQUENCY: &str = "pay_frequency";
/// Distance between two columns, and what a group of columns has more before it, in sizes of print; those of `pay` in
/// `shared/ledger.typ`.
const GUTTER: f64 = 0.6;
const GAP: f64 = 0.5;
/// Width that the names of rows get at least, in sizes of print.
const NAMES: f64 = 8.5;

/// The text of a fact of a job.
pub(super) fn fact<'l>(line: &'l BudgetLine, name: &str) -> Option<&'l str> {
    let facts = &line.terms.facts;
    let fact = facts.iter().find(|fact| fact.name == name)?;
    Some(fact.value.as_str())
}

/// A decimal number, with what follows it left out.
fn number(text: &str) -> Option<Fraction> {
    let figure = text.split(' ').next()?;
    let (whole, part) = figure.split_once('.').unwrap_or((figure, ""));
    let digits: i128 = format!("{whole}{part}").parse().ok()?;
    let places = u32::try_from(part.len())
        .ok()
        .filter(|places| *places < 12)?;
    Some(Fraction::new(digits, 10i128.pow(places)))
}

/// After how many hours a job pays another rate, and that rate; none where it pays none.
pub(super) fn terms_of_premium(line: &BudgetLine) -> Option<(Hours, Fraction)> {
    let after = number(fact(line, PREMIUM.0)?)? * Fraction::whole(100);
    let wage = number(fact(line, PREMIUM.1)?)?;
    let after = Hours(i64::try_from(after.floor()).ok()?);
    (!wage.is_zero()).then_some((after, wage))
}

/// Hours at the basic rate and beyond, and the rate beyond; none where nothing is paid beyond.
pub(super) fn premium(line: &BudgetLine, hours: Hours) -> Option<(Hours, Hours, Fraction)> {
    let (after, wage) = terms_of_premium(line)?;
    let beyond = Hours((hours.0 - after.0).max(0));
    (beyond.0 > 0).then_some((Hours(hours.0 - beyond.0), beyond, wage))
}

/// The sums of one point in the statement period, each with the sign with which it enters what reaches the person.
pub(super) struct Amounts {
    basic: Money,
    premium: Money,
    further: Money,
    given_up: Money,
    /// By position of the item, in the order of the statement.
    off: Vec<(usize, Money)>,
}

impl Amounts {
    /// The sums of a point on a line.
    pub fn new(page: &Page<'_>, line: &BudgetLine, point: &Point) -> Amounts {
        let sum = |point: &Point, kinds: &[ItemKind]| -> Money {
            let taken = page.taken(kinds).into_iter();
            taken.map(|item| point.items[item]).sum()
        };
        // At no hours in this job, only the further jobs pay.
        let none = line.grid.first().filter(|first| first.hours.0 == 0);
        let others = |kinds: &[ItemKind]| none.map_or(Money::ZERO, |none| sum(none, kinds));
        let further = others(&[ItemKind::Pay]);
        let own = sum(point, &[ItemKind::Pay]) - further;
        // Basic pay is rounded for itself, so that the same hours always bring the same; the premium is the rest of the pay.
        let premium = match premium(line, point.hours) {
            Some((basic, beyond, wage)) => {
                let low = basic.as_fraction() * Fraction::new(i128::from(line.terms.wage), 10_000);
                let high = beyond.as_fraction() * wage;
                let exact = unrounded(line, point.hours).unwrap_or(point.pay.in_units());
                own - money((exact - further.in_units()) * low / (low + high))
            }
            None => Money::ZERO,
        };
        let sacrifices = fact(line, SACRIFICE.0) == Some(SACRIFICE.1);
        let pension = page.taken(&[ItemKind::Pension]);
        let given_up = if sacrifices {
            others(&[ItemKind::Pension]) - sum(point, &[ItemKind::Pension])
        } else {
            Money::ZERO
        };
        let mut off = vec![];
        let kinds = [
            ItemKind::Pension,
            ItemKind::Tax,
            ItemKind::Contribution,
            ItemKind::Loan,
        ];
        for kind in kinds {
            for item in page.taken(&[kind]) {
                let whole = point.items[item];
                let left = if sacrifices && pension.contains(&item) {
                    none.map_or(Money::ZERO, |none| none.items[item])
                } else {
                    whole
                };
                off.push((item, -left));
            }
        }
        Amounts {
            basic: own - premium,
            premium,
            further,
            given_up,
            off,
        }
    }

    /// Pay before anything is given up or comes off.
    pub fn gross(&self) -> Money {
        self.basic + self.premium + self.further
    }

    /// What reaches the person.
    pub fn net(&self) -> Money {
        let off: Money = self.off.iter().map(|(_, sum)| *sum).sum();
        self.gross() + self.given_up + off
    }
}

/// E at some hours without its rounding, from the segment that holds them.
fn unrounded(line: &BudgetLine, hours: Hours) -> Option<Fraction> {
    let at = hours.as_fraction();
    let mut segments = line.segments.iter();
    let segment = segments.find(|segment| segment.from <= at && at <= segment.to)?;
    let wide = segment.to - segment.from;
    if wide.is_zero() {
        return Some(segment.pay_from);
    }
    let slope = (segment.pay_to - segment.pay_from) / wide;
    Some(segment.pay_from + slope * (at - segment.from))
}

/// A part of a sum, rounded half up to the minor unit.
fn share(sum: Money, part: Fraction, whole: Fraction) -> Money {
    if whole.is_zero() {
        return Money::ZERO;
    }
    let exact = Fraction::whole(i128::from(sum.0)) * part / whole;
    let pence = divide_rounded(exact.numerator(), exact.denominator(), Direction::HalfUp);
    Money(i64::try_from(pence).unwrap_or(i64::MAX))
}

/// A period: its word, and how many there are in a year.
#[derive(Clone, Copy, PartialEq, Eq)]
struct Period {
    word: &'static str,
    a_year: i64,
}

/// How often a year a sum of this period falls due; those of the word for a statement period, or of a pay frequency.
fn period(word: &str) -> Option<Period> {
    let known = [
        ("week", 52),
        ("fortnight", 26),
        ("four_weeks", 13),
        ("month", 12),
        ("year", 1),
    ];
    let found = known.into_iter().find(|(name, _)| *name == word);
    found.map(|(word, a_year)| Period { word, a_year })
}

/// A row before it is written.
enum Source {
    Plain(String, Vec<Money>),
    Total(String),
}

/// The tables, one a step, and a note on the pay period.
pub(super) fn tables(page: &Page<'_>) -> Result<(Vec<PayTable>, String), StatementError> {
    let words = &page.words;
    let statement = period(&words.context.period);
    let line = page.earner.lines.first();
    let paid = line
        .and_then(|line| fact(line, FREQUENCY))
        .and_then(period)
        .or(statement);
    let mut tables = vec![];
    for step in page.shown() {
        tables.extend(table(page, step, (statement, paid))?);
    }
    let note = match paid.filter(|paid| Some(*paid) != statement) {
        Some(paid) => {
            let name = words.plain(&format!("payslip.each.{}", paid.word))?;
            words.say("payslip.spread", &[("each", &name)])?
        }
        None => String::new(),
    };
    Ok((tables, note))
}

/// One step's table; in pieces where its groups of columns do not fit side by side.
fn table(
    page: &Page<'_>,
    step: &Step<'_>,
    (statement, paid): (Option<Period>, Option<Period>),
) -> Result<Vec<PayTable>, StatementError> {
    let words = &page.words;
    let to = Amounts::new(page, step.line, step.to);
    let mut points = vec![];
    if let Some((line, point)) = page.today() {
        let hours = words.say("table.hours", &[("hours", &hours_text(point.hours))])?;
        let name = words.plain("table.today")?;
        points.push((Column { name, hours }, Amounts::new(page, line, point)));
    }
    let hours = words.say("table.hours", &[("hours", &hours_text(step.to.hours))])?;
    let name = step.name.clone();
    points.push((Column { name, hours }, to));
    let sources = sources(page, &points)?;
    let mut groups: Vec<(PayGroup, Vec<Vec<Money>>)> = vec![];
    let mut add = |own: Option<Period>, change: bool| -> Result<(), StatementError> {
        let factor = |sum: Money| match (statement, own) {
            (Some(from), Some(to)) => share(
                sum,
                Fraction::whole(i128::from(from.a_year)),
                Fraction::whole(i128::from(to.a_year)),
            ),
            (Some(_) | None, Some(_) | None) => sum,
        };
        let word = own.map_or(words.context.period.as_str(), |own| own.word);
        let mut columns: Vec<Column> = points.iter().map(|(column, _)| column.clone()).collect();
        let mut sums: Vec<Vec<Money>> = vec![];
        for place in 0..points.len() {
            sums.push(column(&sources, place, factor));
        }
        if change && points.len() == 2 {
            columns.push(Column {
                name: words.plain("payslip.change")?,
                hours: String::new(),
            });
            let rows = sums[0].iter().zip(&sums[1]);
            sums.push(rows.map(|(now, then)| *then - *now).collect());
        }
        groups.push((
            PayGroup {
                name: words.plain(&format!("payslip.per.{word}"))?,
                columns,
            },
            sums,
        ));
        Ok(())
    };
    add(paid, true)?;
    let year = period("year");
    if statement.is_some() && paid != year {
        add(year, false)?;
    }
    pieces(page, step, &sources, groups)
}

/// The sums of one column: plain rows scaled each by itself, totals the sums of the plain rows above.
fn column(sources: &[Source], place: usize, factor: impl Fn(Money) -> Money) -> Vec<Money> {
    let mut so_far = Money::ZERO;
    let rows = sources.iter().map(|source| match source {
        Source::Plain(_, sums) => {
            let sum = factor(sums[place]);
            so_far += sum;
            sum
        }
        Source::Total(_) => so_far,
    });
    rows.collect()
}

/// The rows; a row that is nothing everywhere is left out, basic pay never.
fn sources(page: &Page<'_>, points: &[(Column, Amounts)]) -> Result<Vec<Source>, StatementError> {
    let words = &page.words;
    let mut rows = vec![];
    let mut push = |name: String, of: &dyn Fn(&Amounts) -> Money, always: bool| -> bool {
        let sums: Vec<Money> = points.iter().map(|(_, amounts)| of(amounts)).collect();
        let stands = always || sums.iter().any(|sum| sum.0 != 0);
        if stands {
            rows.push(Source::Plain(name, sums));
        }
        stands
    };
    push(words.plain("payslip.row.basic")?, &|one| one.basic, true);
    push(
        words.plain("payslip.row.premium")?,
        &|one| one.premium,
        false,
    );
    push(
        words.plain("payslip.row.further")?,
        &|one| one.further,
        false,
    );
    rows.push(Source::Total(words.plain("payslip.row.gross")?));
    let mut push = |name: String, of: &dyn Fn(&Amounts) -> Money| -> bool {
        let sums: Vec<Money> = points.iter().map(|(_, amounts)| of(amounts)).collect();
        let stands = sums.iter().any(|sum| sum.0 != 0);
        if stands {
            rows.push(Source::Plain(name, sums));
        }
        stands
    };
    if push(words.plain("payslip.row.given_up")?, &|one| one.given_up) {
        rows.push(Source::Total(words.plain("payslip.row.contract")?));
    }
    let count = points.first().map_or(0, |(_, one)| one.off.len());
    let mut folded = vec![Money::ZERO; points.len()];
    for place in 0..count {
        let item = points[0].1.off[place].0;
        let sums: Vec<Money> = points.iter().map(|(_, one)| one.off[place].1).collect();
        if words.folded(&words.assessment.items[item].name) {
            for (all, sum) in folded.iter_mut().zip(&sums) {
                *all += *sum;
            }
        } else if sums.iter().any(|sum| sum.0 != 0) {
            let star = star(page, item);
            let name = format!("{}{star}", capital(&words.item(item)?));
            rows.push(Source::Plain(name, sums));
        }
    }
    if folded.iter().any(|sum| sum.0 != 0) {
        rows.push(Source::Plain(capital(&words.plain("sum.folded")?), folded));
    }
    rows.push(Source::Total(words.plain("payslip.row.net")?));
    Ok(rows)
}

/// The sign of an item that rests on amounts nobody has checked.
fn star(page: &Page<'_>, item: usize) -> &'static str {
    let mut points: Vec<&Point> = page.shown().map(|step| step.to).collect();
    points.extend(page.today().map(|(_, point)| point));
    page.words.marks.of_points(&points, |one| one == item)
}

/// A group of columns with its sums, column by column.
type Group = (PayGroup, Vec<Vec<Money>>);

/// Groups that stand side by side: all of them where they have room beside the names, else each for itself, else as many of its columns as
/// have room.
fn fitting(
    groups: Vec<Group>,
    (room, gap): (f64, f64),
    widest: impl Fn(&Column, &[Money]) -> f64,
) -> Vec<Vec<Group>> {
    let wide = |(group, sums): &Group| -> f64 {
        let columns = group.columns.iter().zip(sums);
        columns.map(|(head, sums)| widest(head, sums)).sum()
    };
    if groups.iter().map(|group| wide(group) + gap).sum::<f64>() <= room {
        return vec![groups];
    }
    let mut pieces: Vec<Vec<Group>> = vec![];
    for (group, sums) in groups {
        let mut free = 0.0;
        for (place, (head, sums)) in group.columns.into_iter().zip(sums).enumerate() {
            let wide = widest(&head, &sums);
            match pieces.last_mut().and_then(|piece| piece.last_mut()) {
                Some((part, all)) if place > 0 && wide <= free => {
                    part.columns.push(head);
                    all.push(sums);
                }
                Some(_) | None => {
                    let part = PayGroup {
                        name: group.name.clone(),
                        columns: vec![head],
                    };
                    pieces.push(vec![(part, vec![sums])]);
                    free = room - gap;
                }
            }
            free -= wide;
        }
    }
    pieces
}

/// Groups side by side where they fit, else one below the other.
fn pieces(
    page: &Page<'_>,
    step: &Step<'_>,
    sources: &[Source],
    groups: Vec<Group>,
) -> Result<Vec<PayTable>, StatementError> {
    let words = &page.words;
    let size = f64::from(words.context.delivery.print_size.max(12));
    let paper = crate::statement::build::text_width(&words.context.delivery.paper);
    let bold = |text: &str| width(text, Weight::Bold, size);
    let widest = |head: &Column, sums: &[Money]| {
        let cells = sums.iter().map(|sum| words.currency.exact(*sum));
        let cells = cells.map(|cell| bold(&cell));
        let hours = width(&head.hours, Weight::Regular, size);
        cells
            .chain([bold(&head.name), hours])
            .map(|wide| wide + GUTTER * size)
            .fold(4.0 * size, f64::max)
    };
    // A name may go on in the next line, a word may not.
    let names = sources.iter().map(|source| match source {
        Source::Plain(name, _) => (name, Weight::Regular),
        Source::Total(name) => (name, Weight::Bold),
    });
    let names = names
        .flat_map(|(name, weight)| name.split(' ').map(move |word| width(word, weight, size)))
        .fold(NAMES * size, f64::max);
    let mut tables = vec![];
    for piece in fitting(groups, (paper - names, GAP * size), widest) {
        let columns: Vec<&Vec<Money>> = piece.iter().flat_map(|(_, columns)| columns).collect();
        let rows = sources.iter().enumerate();
        let rows = rows.map(|(place, source)| {
            let (name, weight) = match source {
                Source::Plain(name, _) => (name, RowWeight::Plain),
                Source::Total(name) => (name, RowWeight::Total),
            };
            let cells = columns.iter().map(|column| match (column[place], weight) {
                (Money(0), RowWeight::Plain) => NONE.to_owned(),
                (sum, RowWeight::Plain | RowWeight::Total) => words.currency.exact(sum),
            });
            Row {
                name: name.clone(),
                cells: cells.collect(),
                weight,
            }
        });
        let rows = rows.collect();
        tables.push(PayTable {
            summary: words.say("payslip.summary", &[("step", &step.name)])?,
            rows,
            groups: piece.into_iter().map(|(group, _)| group).collect(),
        });
    }
    Ok(tables)
}

/// What each deduction is for.
pub(super) fn purposes(page: &Page<'_>) -> Result<Vec<Line>, StatementError> {
    let words = &page.words;
    let mut lines: Vec<Line> = vec![];
    let kinds = [
        ItemKind::Pension,
        ItemKind::Tax,
        ItemKind::Contribution,
        ItemKind::Loan,
    ];
    for item in page.taken(&kinds) {
        let mut points: Vec<&Point> = page.shown().map(|step| step.to).collect();
        points.extend(page.today().map(|(_, point)| point));
        let name = &words.assessment.items[item].name;
        // What the contract gives up is no deduction.
        let given_up = |line: &BudgetLine| fact(line, SACRIFICE.0) == Some(SACRIFICE.1);
        let pension = words.assessment.items[item].kind == ItemKind::Pension;
        if points.iter().all(|point| point.items[item].0 == 0)
            || words.folded(name)
            || (pension && page.points().iter().all(|(line, _)| given_up(line)))
        {
            continue;
        }
        if let Some(what) = words.label(&format!("what.{name}")) {
            let line = Line {
                lead: words.say("glossary.lead", &[("name", &words.item(item)?)])?,
                text: what,
            };
            if !lines.contains(&line) {
                lines.push(line);
            }
        }
    }
    Ok(lines)
}
