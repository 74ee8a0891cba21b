//! What a household's results rest on: the facts and amounts that reached its items at given hours.
//! Branches that were not taken do not count.

use super::machine::{Code, Special, position};
use crate::index::Id;
use crate::num::Hours;
use crate::program::{Amount, FactRef, ItemKind, Op, Reg};
use std::collections::{BTreeMap, BTreeSet};

/// Facts and amounts in use.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Used {
    /// Facts, without the varied hours themselves.
    pub facts: BTreeSet<(u32, u32, u32)>,
    /// Amounts by their position in the program, with the title of the instrument that used them first.
    pub amounts: BTreeMap<usize, String>,
}

/// How far back from the items is looked.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Reach {
    /// To all that could have changed a figure.
    Widely,
    /// To what is part of one.
    Closely,
}

impl Special<'_> {
    /// Facts and amounts that reached the items at any of these hours. A fact counts wherever it could have changed a figure; an amount only
    /// where it is part of one, so that a sum that is nothing marks nobody's amounts as used.
    pub fn used(&self, hours: &[Hours]) -> Used {
        let mut used = Used::default();
        let mut values = Vec::new();
        let steps = self.program().steps.len();
        let (mut widely, mut closely) = (vec![false; steps], vec![false; steps]);
        for at in hours {
            self.fill(*at, &mut values);
            self.reach(&values, Reach::Widely, &mut widely);
            self.reach(&values, Reach::Closely, &mut closely);
        }
        self.facts_among(&widely, &mut used);
        self.amounts_among(&closely, &mut used);
        for (line, amount) in self.rows_among(&values, &closely) {
            used.amounts
                .entry(amount)
                .or_insert_with(|| self.program().lines[Id::new(line)].part.clone());
        }
        used
    }

    /// Rows of tables that reached the items at these values: the line that looked each up, and its amount.
    pub(super) fn rows_reached(&self, values: &[i128]) -> Vec<(usize, usize)> {
        let mut reached = vec![false; self.program().steps.len()];
        self.reach(values, Reach::Widely, &mut reached);
        self.rows_among(values, &reached)
    }

    /// Rows of tables among reached steps. Keys do not vary with hours, so the values of any hours pick them.
    fn rows_among(&self, values: &[i128], reached: &[bool]) -> Vec<(usize, usize)> {
        let program = self.program();
        let mut out = vec![];
        for (reg, step) in program.steps.iter_with_id() {
            if let Op::Lookup { table, keys } = &step.op
                && reached[reg.position()]
                && let Some(line) = step.line
            {
                let table = &program.tables[*table];
                let at = position(table, keys.iter().map(|key| values[key.position()]));
                out.extend(table.amounts[at].map(|amount| (line.position(), amount.position())));
            }
        }
        out
    }

    /// Marks the registers that reached the items at these values.
    fn reach(&self, values: &[i128], reach: Reach, reached: &mut [bool]) {
        let program = self.program();
        {
            let mut here = vec![false; program.steps.len()];
            for item in &program.items {
                // Help in kind that is not there was decided by something; a sum that is nothing prints no figure.
                let counts = reach == Reach::Widely
                    || item.kind == ItemKind::Passport
                    || values[item.reg.position()] != 0;
                here[item.reg.position()] = counts;
            }
            for reg in (0..program.steps.len()).rev().map(Reg::new) {
                let step = &program.steps[reg];
                if !here[reg.position()] {
                    continue;
                }
                reached[reg.position()] = true;
                let mut want = |r: &Reg| here[r.position()] = true;
                match &step.op {
                    Op::Choose {
                        when,
                        then,
                        otherwise,
                    } => {
                        want(when);
                        want(if values[when.position()] != 0 {
                            then
                        } else {
                            otherwise
                        });
                    }
                    // Nothing times something rests on the nothing alone.
                    Op::Multiply(a, b)
                        if values[a.position()] == 0 && values[b.position()] != 0 =>
                    {
                        want(a)
                    }
                    Op::Multiply(a, b)
                        if values[b.position()] == 0 && values[a.position()] != 0 =>
                    {
                        want(b)
                    }
                    // Nothing added or taken away is part of no figure, whatever decided it.
                    Op::Add(a, b) | Op::Subtract(a, b) if reach == Reach::Closely => {
                        for side in [a, b] {
                            if values[side.position()] != 0 {
                                want(side);
                            }
                        }
                    }
                    Op::Both(a, _) if values[a.position()] == 0 => want(a),
                    Op::Either(a, _) if values[a.position()] != 0 => want(a),
                    // A fixed limit that did not bite reached nothing.
                    Op::Smaller(a, b) | Op::Larger(a, b) => {
                        let code = &self.machine.exact[reg.position()];
                        let a_wins = match code {
                            Code::Smaller { a, by_a, b, by_b } => {
                                values[*a] * by_a <= values[*b] * by_b
                            }
                            Code::Larger { a, by_a, b, by_b } => {
                                values[*a] * by_a >= values[*b] * by_b
                            }
                            _ => unreachable!("a step and its code do the same"),
                        };
                        let fixed = |r: &Reg| matches!(program.steps[*r].op, Op::Constant(_));
                        if a_wins || !fixed(a) {
                            want(a);
                        }
                        if !a_wins || !fixed(b) {
                            want(b);
                        }
                    }
                    // Nothing lies above the limit here, so neither the limit nor the rate reached anything.
                    Op::Times(a, _)
                        if values[a.position()] == 0
                            && matches!(program.steps[*a].op, Op::Larger(..)) => {}
                    Op::Times(a, _) => {
                        want(a);
                        step.factor.iter().for_each(&mut want);
                    }
                    Op::Constant(_)
                    | Op::Fact(_)
                    | Op::Hours
                    | Op::Add(..)
                    | Op::Subtract(..)
                    | Op::Multiply(..)
                    | Op::AtLeast(..)
                    | Op::Above(..)
                    | Op::Same(..)
                    | Op::Both(..)
                    | Op::Either(..)
                    | Op::Not(_)
                    | Op::Round { .. }
                    | Op::Divide { .. }
                    | Op::Lookup { .. }
                    | Op::Years { .. } => {
                        super::walk::operands(&self.machine.exact[reg.position()], &mut |r| {
                            here[r] = true
                        })
                    }
                }
            }
        }
    }

    /// The registers that could have changed an item at these values: those of branches that were not taken are not among them.
    pub(super) fn deciding(&self, values: &[i128]) -> Vec<bool> {
        let mut reached = vec![false; self.program().steps.len()];
        self.reach(values, Reach::Widely, &mut reached);
        reached
    }

    fn facts_among(&self, reached: &[bool], used: &mut Used) {
        let program = self.program();
        for (reg, step) in program.steps.iter_with_id() {
            if let Op::Fact(input) = &step.op
                && reached[reg.position()]
            {
                let FactRef {
                    kind,
                    instance,
                    fact,
                } = program.inputs[*input].fact;
                used.facts.insert((kind, instance, fact));
            }
        }
    }

    fn amounts_among(&self, reached: &[bool], used: &mut Used) {
        let program = self.program();
        let steps = program
            .steps
            .iter_with_id()
            .filter(|(reg, _)| reached[reg.position()]);
        let lines: BTreeSet<usize> = steps
            .filter_map(|(_, step)| step.line.map(Id::position))
            .collect();
        // An amount that was folded into another constant counts where its line does.
        for at in lines {
            let line = &program.lines[Id::new(at)];
            for amount in &line.amounts {
                let name = &program.amounts[*amount].name;
                let reg = line
                    .inputs
                    .iter()
                    .find(|e| e.name == *name)
                    .map(|e| e.reg.position());
                if reg.is_none_or(|r| reached[r] || !self.machine.read[r]) {
                    used.amounts
                        .entry(amount.position())
                        .or_insert_with(|| line.part.clone());
                }
            }
        }
    }

    /// The amount at a position.
    pub fn amount(&self, at: usize) -> &Amount {
        &self.program().amounts[Id::new(at)]
    }
}
