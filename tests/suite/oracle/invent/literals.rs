//! Types and literals.

use super::*;

impl Maker<'_> {
    pub(super) fn any_type(&mut self) -> Ty {
        match self.luck.below(20) {
            0..=4 => Ty::Money(Some(MONTH)),
            5..=9 => Ty::Money(Some(self.luck.below(5))),
            10 => Ty::Money(None),
            11 => Ty::Rate,
            12 => Ty::Hours,
            13 | 14 => Ty::Number,
            15 | 16 => Ty::Count,
            17 => Ty::Date,
            18 if !self.choices.is_empty() => Ty::Choice(self.luck.below(self.choices.len())),
            _ => Ty::YesNo,
        }
    }

    pub(super) fn any_quantity(&mut self) -> Ty {
        loop {
            match self.any_type() {
                Ty::Date | Ty::YesNo | Ty::Choice(_) => {}
                ty => return ty,
            }
        }
    }

    pub(super) fn type_text(&self, ty: Ty) -> String {
        match ty {
            Ty::Money(None) => "money".into(),
            Ty::Money(Some(0)) => "money an hour".into(),
            Ty::Money(Some(period)) => format!("money a {}", PERIODS[period]),
            Ty::Rate => "rate".into(),
            Ty::Hours => "hours".into(),
            Ty::Number => "number".into(),
            Ty::Count => "count".into(),
            Ty::Date => "date".into(),
            Ty::YesNo => "yesno".into(),
            Ty::Choice(at) => format!("choice_{at}"),
        }
    }

    /// A number with up to two decimals.
    pub(super) fn decimal(&mut self, most: i64) -> String {
        let hundredths = match self.luck.below(3) {
            0 => self.luck.between(0, most) * 100,
            1 => self.luck.between(0, most * 4) * 25,
            _ => self.luck.between(0, most * 100),
        };
        if hundredths % 100 == 0 {
            format!("{}", hundredths / 100)
        } else {
            format!("{}.{:02}", hundredths / 100, hundredths % 100)
        }
    }

    pub(super) fn size(&mut self, ty: Ty) -> String {
        let most = match ty {
            Ty::Money(Some(0)) => 30,
            Ty::Money(Some(1)) => 100,
            Ty::Money(Some(2)) => 500,
            Ty::Money(Some(4)) => 30_000,
            Ty::Money(_) => 2500,
            Ty::Rate => 100,
            Ty::Hours => 50,
            _ => 12,
        };
        self.decimal(most)
    }

    pub(super) fn literal(&mut self, ty: Ty) -> Piece {
        Piece::plain(match ty {
            Ty::Money(None) => format!("money {}", self.size(ty)),
            Ty::Money(Some(period)) => format!(
                "money {} {} {}",
                self.size(ty),
                if period == 0 { "an" } else { "a" },
                PERIODS[period]
            ),
            Ty::Rate => format!("{}%", self.size(ty)),
            Ty::Hours => format!("{} hours", self.size(ty)),
            Ty::Number => self.size(ty),
            Ty::Count => format!("{}", self.luck.below(13)),
            Ty::Date => (*self.luck.pick(&[
                "2025-06-01",
                "2026-04-06",
                "2008-02-29",
                "1990-01-01",
                "2017-04-06",
            ]))
            .to_owned(),
            Ty::YesNo => (*self.luck.pick(&["yes", "no"])).to_owned(),
            Ty::Choice(at) => {
                let words = self.choices[at].clone();
                self.luck.pick(&words).clone()
            }
        })
    }
}
