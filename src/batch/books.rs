//! A checked pack at a list's dates, ready to assess household after household. Programs are made once for each shape of
//! household and earner, and kept.

use crate::case::{Household, Schema};
use crate::engine::{JobChoice, Machine};
use crate::load::{Terms, schema_of};
use crate::measures::{Programs, Request, Verdict, WorkingLine, assess, working_at};
use crate::num::Hours;
use crate::program::Shape;
use crate::rules::Pack;
use crate::source::Span;
use std::collections::HashMap;
use std::sync::Arc;

/// How many programs are kept. Few shapes make up most of a list; beyond this number all are dropped and made again, so that
/// memory stays flat.
const KEPT: usize = 64;

/// A pack with dates and changed amounts.
pub struct Books {
    schema: Schema,
    request: Request,
    shelf: Shelf,
}

/// The programs made so far.
struct Shelf {
    pack: Pack,
    terms: Terms,
    machines: HashMap<Shape, Arc<Machine>>,
}

impl Programs for Shelf {
    fn machine(&mut self, shape: &Shape) -> Result<Arc<Machine>, String> {
        if let Some(machine) = self.machines.get(shape) {
            return Ok(Arc::clone(machine));
        }
        let program = self
            .pack
            .program(&self.terms.dates, &self.terms.changes, shape)
            .map_err(|faults| {
                let lines: Vec<String> = faults
                    .iter()
                    .map(|fault| fault.line(&self.pack.sources))
                    .collect();
                lines.join("; ")
            })?;
        if self.machines.len() >= KEPT {
            self.machines.clear();
        }
        let machine = Arc::new(Machine::new(program));
        self.machines.insert(shape.clone(), Arc::clone(&machine));
        Ok(machine)
    }
}

impl Books {
    /// Opens a pack at these terms.
    pub fn new(pack: Pack, terms: Terms) -> Books {
        let ordinary = Request::default();
        Books {
            schema: schema_of(&pack),
            request: Request {
                grid_to: terms.grid_to.unwrap_or(ordinary.grid_to),
                grid_step: terms.grid_step.unwrap_or(ordinary.grid_step),
                ..ordinary
            },
            shelf: Shelf {
                pack,
                terms,
                machines: HashMap::new(),
            },
        }
    }

    /// What a list for the pack may hold.
    pub fn schema(&self) -> &Schema {
        &self.schema
    }

    /// Works one household out.
    ///
    /// # Errors
    /// Where the pack cannot make a program for its shape.
    pub fn assess(&mut self, household: &Household) -> Result<Verdict, String> {
        assess(
            household,
            &self.schema,
            &mut self.shelf,
            &self.request,
            household.target,
        )
    }

    /// The working at one point, with each rule as it stands in the pack.
    ///
    /// # Errors
    /// Where there is no such adult or offer, or the pack cannot make a program.
    pub fn working(
        &mut self,
        household: &Household,
        adult: usize,
        choice: JobChoice,
        hours: Hours,
    ) -> Result<Vec<WorkingLine>, String> {
        let sources = self.shelf.pack.sources.clone();
        let rule = |span: Span| -> String {
            let words: Vec<&str> = sources.slice(span).split_whitespace().collect();
            words.join(" ")
        };
        working_at(
            household,
            &self.schema,
            &mut self.shelf,
            adult,
            choice,
            hours,
            &rule,
        )
    }
}
