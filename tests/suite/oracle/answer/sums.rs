//! Counted values, ladders and tables.

use super::*;

impl Oracle<'_> {
    /// The records that a condition counts, kind by kind.
    pub(super) fn counted(
        &self,
        over: &Search,
        place: &Place<'_>,
        run: &Run,
    ) -> Vec<(usize, usize)> {
        let kinds = self.book.kinds_of(&over.kind);
        let all = kinds.into_iter().flat_map(|kind| {
            self.among(kind, place)
                .into_iter()
                .map(move |record| (kind, record))
        });
        all.filter(|(kind, record)| self.eligible(over, *kind, *record, place, run))
            .collect()
    }

    /// Evaluates what stands on the lines of bands or a scale where these were declared.
    pub(super) fn on_ladder<T>(
        &self,
        ladder: &Ladder,
        place: &Place<'_>,
        call: impl FnOnce(&Place<'_>) -> T,
    ) -> T {
        let (kind, record) = place.here();
        let own = self
            .owner(kind, record, ladder.kind)
            .expect("a ladder can be reached");
        call(&Place {
            world: place.world,
            part: ladder.part,
            scopes: &vec![(ladder.kind, own)],
        })
    }

    /// The row of a table; a count outside takes the nearest end.
    pub(super) fn looked_up(&self, name: &str, keys: &[Value], part: usize) -> Value {
        let table = &self.book.tables[name];
        let mut rows = self.picked(table.rows.iter(), part);
        // A table that local files fill gives nothing for a word without rows.
        let first = keys[0].clone();
        if table.keys[0].is_some() {
            let first = first.word();
            rows.retain(|row| row.keys[0] == first);
        }
        if rows.is_empty() {
            return match self.book.choices.get(&table.gives) {
                Some(words) => Value::Word(words[0].clone()),
                None => Value::Number(whole(0)),
            };
        }
        for (at, key) in keys.iter().enumerate() {
            let wanted = match key {
                key if table.keys[at].is_some() => key.clone().word(),
                count => {
                    let column = rows
                        .iter()
                        .map(|row| row.keys[at].parse::<i64>().expect("a count"));
                    let (low, high) = (
                        column.clone().min().expect("a table has rows"),
                        column.max().expect("a table has rows"),
                    );
                    let count = count.clone().number().to_integer();
                    count
                        .clamp(BigInt::from(low), BigInt::from(high))
                        .to_string()
                }
            };
            rows.retain(|row| row.keys[at] == wanted);
        }
        cell(rows[0].value.as_ref())
    }
}
