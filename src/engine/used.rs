//! What a household's results rest on: the facts and amounts that reached its items at given hours.
//! Branches that were not taken do not count.

use super::machine::Special;
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

impl Special<'_> {
    /// Facts and amounts that reached the items at any of these hours.
    pub fn used(&self, hours: &[Hours]) -> Used {
        let program = self.program();
        let mut reached = vec![false; program.steps.len()];
        let mut values = Vec::new();
        for at in hours {
            self.fill(*at, &mut values);
            let mut here = vec![false; program.steps.len()];
            // An item that is nothing here prints no figure; help in kind that is not there was decided by something.
            for item in &program.items {
                let counts = item.kind == ItemKind::Passport || values[item.reg.position()] != 0;
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
                    Op::Constant(_) | Op::Fact(_) | Op::Hours => {}
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
                    Op::Both(a, _) if values[a.position()] == 0 => want(a),
                    Op::Either(a, _) if values[a.position()] != 0 => want(a),
                    // A fixed limit that did not bite reached nothing.
                    Op::Smaller(a, b) | Op::Larger(a, b) => {
                        let smaller = matches!(step.op, Op::Smaller(..));
                        let (x, y) = (program.steps[*a].scale.exact, program.steps[*b].scale.exact);
                        let (left, right) = (values[a.position()] * y, values[b.position()] * x);
                        let a_wins = if smaller {
                            left <= right
                        } else {
                            left >= right
                        };
                        let fixed = |r: &Reg| matches!(program.steps[*r].op, Op::Constant(_));
                        if a_wins || !fixed(a) {
                            want(a);
                        }
                        if !a_wins || !fixed(b) {
                            want(b);
                        }
                    }
                    // Nothing added or taken away reached nothing, whatever it rests on.
                    Op::Add(a, b) | Op::Subtract(a, b) => {
                        for side in [a, b] {
                            if values[side.position()] != 0 {
                                want(side);
                            }
                        }
                    }
                    Op::Multiply(a, b)
                    | Op::AtLeast(a, b)
                    | Op::Above(a, b)
                    | Op::Same(a, b)
                    | Op::Both(a, b)
                    | Op::Either(a, b)
                    | Op::Years { from: a, to: b }
                    | Op::Divide { of: a, by: b, .. } => {
                        want(a);
                        want(b);
                    }
                    // Nothing lies above the limit here, so neither the limit nor the rate reached anything.
                    Op::Times(a, _)
                        if values[a.position()] == 0
                            && matches!(program.steps[*a].op, Op::Larger(..)) => {}
                    Op::Times(a, _) => {
                        want(a);
                        step.factor.iter().for_each(&mut want);
                    }
                    Op::Round { of: a, .. } | Op::Not(a) => want(a),
                    Op::Lookup { keys, .. } => keys.iter().for_each(want),
                }
            }
        }
        let mut used = Used::default();
        let mut lines = BTreeSet::new();
        for (reg, step) in program.steps.iter_with_id() {
            if !reached[reg.position()] {
                continue;
            }
            if let Op::Fact(input) = &step.op {
                let FactRef {
                    kind,
                    instance,
                    fact,
                } = program.inputs[*input].fact;
                used.facts.insert((kind, instance, fact));
            }
            lines.extend(step.line.map(Id::position));
        }
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
        used
    }

    /// The amount at a position.
    pub fn amount(&self, at: usize) -> &Amount {
        &self.program().amounts[Id::new(at)]
    }
}
