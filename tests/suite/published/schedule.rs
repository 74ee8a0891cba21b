//! A schedule of the second degree: § 32a of the German Income Tax Act. The walk's curves against the statute's formulas in big rationals.

use super::{Shelf, rate};
use hourworth::engine::{JobChoice, Machine, Setting};
use hourworth::load::Case;
use hourworth::num::Fraction;
use hourworth::rules::Moment;
use num_rational::BigRational;

/// The constants of § 32a Abs. 1 EStG, as the statute prints them, and the lump sums of §§ 9a and 10c.
struct Schedule {
    date: i64,
    limits: [&'static str; 4],
    second: [&'static str; 2],
    third: [&'static str; 3],
    fourth: [&'static str; 2],
    fifth: [&'static str; 2],
}

fn schedules() -> [Schedule; 2] {
    let day = |text: &str| hourworth::rules::day(text).expect("a day");
    [
        Schedule {
            date: day("2025-06-02"),
            limits: ["12096", "17443", "68480", "277825"],
            second: ["932.30", "1400"],
            third: ["176.64", "2397", "1015.13"],
            fourth: ["0.42", "10911.92"],
            fifth: ["0.45", "19246.67"],
        },
        Schedule {
            date: day("2026-06-02"),
            limits: ["12348", "17799", "69878", "277825"],
            second: ["914.51", "1400"],
            third: ["173.10", "2397", "1034.87"],
            fourth: ["0.42", "11135.63"],
            fifth: ["0.45", "19470.38"],
        },
    ]
}

fn big(text: &str) -> BigRational {
    let (whole, part) = text.split_once('.').unwrap_or((text, ""));
    let digits: num_bigint::BigInt = format!("{whole}{part}").parse().expect("digits");
    BigRational::new(digits, num_bigint::BigInt::from(10).pow(part.len() as u32))
}

fn of(value: Fraction) -> BigRational {
    BigRational::new(value.numerator().into(), value.denominator().into())
}

impl Schedule {
    /// The tax of a year on this taxable income, without the law's rounding to whole euros. On a limit the upper zone's formula is taken
    /// where `above`.
    fn tax(&self, taxable: &BigRational, above: bool) -> BigRational {
        let zone = self
            .limits
            .iter()
            .filter(|limit| *taxable > big(limit) || (above && *taxable == big(limit)))
            .count();
        let tenthousandths = |limit: &str| (taxable - big(limit)) / big("10000");
        match zone {
            0 => big("0"),
            1 => {
                let y = tenthousandths(self.limits[0]);
                (big(self.second[0]) * &y + big(self.second[1])) * y
            }
            2 => {
                let z = tenthousandths(self.limits[1]);
                (big(self.third[0]) * &z + big(self.third[1])) * z + big(self.third[2])
            }
            3 => big(self.fourth[0]) * taxable - big(self.fourth[1]),
            _ => big(self.fifth[0]) * taxable - big(self.fifth[1]),
        }
    }
}

/// One adult or a couple at 100 euros an hour: one hour a week is 5,200 a year.
fn german_household(adults: usize) -> String {
    let mut text = String::from("reference = \"X1\"\n");
    for letter in ["A", "B"].iter().take(adults) {
        text += &format!(
            "[[member]]\nref = \"{letter}\"\nrole = \"adult\"\nname = \"Adult\"\nbirth = 1985-03-03\n"
        );
    }
    text + "[[job]]\nmember = \"A\"\nstatus = \"today\"\nhours = \"40\"\nwage = \"100\"\n"
}

#[test]
fn the_walk_is_exact_on_the_curves_of_the_german_schedule() {
    let shelf = Shelf::open("de_32a");
    for schedule in schedules() {
        for adults in [1, 2] {
            let case = Case {
                date: schedule.date,
                changes: vec![],
                household: german_household(adults),
                expects: vec![],
            };
            let books = shelf.books(&case);
            let household = shelf.household(&case, &books, None);
            let setting = Setting::new(&household, 0, JobChoice::Today).expect("an adult in work");
            let program = shelf
                .pack
                .program(&[case.date], &[], &setting.shape)
                .expect("a program");
            let machine = Machine::new(program);
            let special = machine.special(&setting.facts(machine.program()));
            let walk = special.walk(Fraction::whole(120));
            let items = &machine.program().items;
            let tax_item = items
                .iter()
                .position(|item| machine.program().lines[item.line].name == "income_tax")
                .expect("the tax");

            let share = i128::try_from(adults).expect("two at most");
            let off = Fraction::whole(1230 + 36 * share);
            let taxable = |hours: Fraction| {
                (of(hours * Fraction::whole(5200) - off) / of(Fraction::whole(share))).max(big("0"))
            };
            let month = |taxable: &BigRational, above| {
                schedule.tax(taxable, above) * of(Fraction::whole(share)) / big("12")
            };

            // Turns lie at the limits of the law, and each zone has its degree.
            let limits = schedule
                .limits
                .map(|limit| (rate(limit) * Fraction::whole(share) + off) / Fraction::whole(5200));
            let degree_at = |hours: Fraction| {
                let piece = walk
                    .pieces
                    .iter()
                    .find(|p| p.from <= hours && hours < p.to)
                    .expect("the walk has no gaps");
                let curve = &piece.items[tax_item];
                if curve.c[2] != 0 {
                    2
                } else {
                    usize::from(curve.c[1] != 0)
                }
            };
            for (zone, limit) in limits.iter().enumerate() {
                assert!(
                    walk.bends.iter().any(|bend| bend.at == *limit),
                    "{} {adults}: no turn at {}",
                    case.date,
                    limit.decimal(4)
                );
                assert_eq!(degree_at(*limit), [2, 2, 1, 1][zone], "zone {}", zone + 2);
            }

            // 400 places spread over all stretches, and both ends of each: equal, not near.
            let mut compared = 0;
            for piece in &walk.pieces {
                let curve = &piece.items[tax_item];
                let inside = |n: i128| piece.from + (piece.to - piece.from) * Fraction::new(n, 401);
                for n in 1..=400 {
                    let hours = inside(n);
                    assert_eq!(
                        of(curve.at(hours)),
                        month(&taxable(hours), false),
                        "{} {adults}: at {}",
                        case.date,
                        hours.decimal(6)
                    );
                    compared += 1;
                }
                assert_eq!(
                    of(curve.at(piece.from)),
                    month(&taxable(piece.from), true),
                    "start of {}",
                    piece.from.decimal(6)
                );
                assert_eq!(
                    of(curve.at(piece.to)),
                    month(&taxable(piece.to), false),
                    "end of {}",
                    piece.to.decimal(6)
                );
            }
            assert!(compared >= 2000, "{compared} places");
        }
    }
}

/// On a curved stretch the marginal rate rises along it: at a point it is the derivative there, (2 q y + 1400) / 10000.
#[test]
fn the_marginal_rate_on_a_curve_is_its_derivative() {
    let shelf = Shelf::open("de_32a");
    let schedule = &schedules()[0];
    let case = Case {
        date: schedule.date,
        changes: vec![],
        household: german_household(1),
        expects: vec![],
    };
    let mut books = shelf.books(&case);
    let household = shelf.household(&case, &books, None);
    for (hours, zone, square, line) in [(3, 0, 0, 1), (4, 1, 0, 1), (9, 1, 0, 1)] {
        let constants: &[&str] = if zone == 0 {
            &schedule.second
        } else {
            &schedule.third
        };
        let taxable = Fraction::whole(5200 * hours - 1266);
        let part = (taxable - rate(schedule.limits[zone])) / Fraction::whole(10_000);
        let wanted = (Fraction::whole(2) * rate(constants[square]) * part + rate(constants[line]))
            / Fraction::whole(10_000);
        let found = books
            .metr(&household, 0, Fraction::whole(hours), Moment::Now)
            .expect("a rate");
        assert_eq!(found, wanted, "at {hours} hours");
    }
}
