//! Steps of a run and kept variants: looking back, taking one, solving those that have no figures yet.

use super::history::Kept;
use super::log;
use super::studio::Studio;
use super::words::Edit;
use crate::base::Vec2;
use crate::study::{Case, Design, Improved, Insert, SolveReport, Variant};
use std::sync::Arc;

impl Studio {
    pub(super) fn finished(&mut self, improved: &Improved) {
        let now = |studio: &Self| Kept {
            design: studio.project.design.clone(),
            run: studio.project.run.clone(),
        };
        self.history.begin(&now(self));
        self.project.design = (*improved.best.case.design).clone();
        self.history.finish("improve".into(), &now(self));
        self.looked_at = None;
        let (start, best) = (improved.start.aim_value, improved.best.aim_value);
        let change = if start != 0.0 {
            100.0 * (best / start - 1.0)
        } else {
            0.0
        };
        let text = format!(
            "{}: {change:+.1} % after {} steps and {} states. {}",
            self.project.design.aim.words(),
            improved.steps,
            improved.evaluations,
            improved.stop_sentence
        );
        log(&format!("finished aim={best:.6e} change={change:.3}"));
        self.keep(
            "before improving",
            improved.start.case.design.inserts.clone(),
            Some(improved.start.report.clone()),
        );
        self.message = Some((text, false));
    }

    /// Keep inserts as a variant under a free name.
    pub(super) fn keep(&mut self, stem: &str, inserts: Vec<Insert>, report: Option<SolveReport>) {
        let taken = |n: &str| self.project.variants.iter().any(|v| v.name == n);
        let name = (1..)
            .map(|i| {
                if i == 1 && stem != "variant" {
                    stem.to_owned()
                } else {
                    format!("{stem} {i}")
                }
            })
            .find(|n| !taken(n))
            .unwrap_or_default();
        self.project.variants.push(Variant {
            name: name.clone(),
            inserts,
        });
        if let Some(report) = report {
            self.kept.push((name.clone(), Arc::new(report)));
            self.compared = Some(name.clone());
        }
        self.message = Some((format!("Kept as \"{name}\"."), false));
    }

    /// The design a run had at one of its steps.
    pub(super) fn design_at(&self, step: usize) -> Option<Design> {
        let record = self.link.steps.get(step)?;
        let mut design = (*self.link.run_case.as_ref()?.design).clone();
        for (insert, points) in design.inserts.iter_mut().zip(&record.inserts_m) {
            insert.points_m.clone_from(points);
        }
        Some(design)
    }

    /// Take a step of the last run as design or as variant. Its shapes go to the inserts of the same names; where one
    /// is gone nothing is changed and the reason is told.
    pub fn take_step(&mut self, step: usize, as_variant: bool) {
        let (Some(then), Some(record)) = (self.design_at(step), self.link.steps.get(step)) else {
            return;
        };
        let (number, report) = (record.step, record.report.clone());
        if as_variant {
            self.keep(
                &format!("step {number}"),
                then.inserts,
                report.map(|r| (*r).clone()),
            );
            return;
        }
        let mut design = self.project.design.clone();
        for insert in then.inserts {
            match design.inserts.iter_mut().find(|i| i.name == insert.name) {
                Some(present) => present.points_m = insert.points_m,
                None => {
                    self.message = Some((
                        format!(
                            "Step {number} has the insert \"{}\", which is no longer in the drawing: keep the step as a variant, or undo until the insert is back.",
                            insert.name
                        ),
                        true,
                    ));
                    return;
                }
            }
        }
        self.edit_whole(Edit::Replace {
            to: Box::new(design),
            name: format!("take step {number}"),
        });
    }

    /// Look at a step of the last run, or at the present design.
    pub fn look_at(&mut self, step: Option<usize>) {
        self.looked_at = step.filter(|&k| k < self.link.steps.len());
    }

    /// Contours of the accepted steps before one, oldest first, m.
    pub(super) fn ghosts(&self, last: usize) -> Vec<Vec<Vec<Vec2>>> {
        self.link.steps[..last.min(self.link.steps.len())]
            .iter()
            .filter(|s| s.accepted)
            .map(|s| s.inserts_m.clone())
            .collect()
    }

    /// The case of a kept variant under the present conditions.
    pub(super) fn case_of(&self, variant: &Variant) -> Case {
        let mut project = self.project.clone();
        project.design.inserts.clone_from(&variant.inserts);
        project.case()
    }

    /// Figures of variants that have none (read from a file) are computed while nothing else is to do.
    pub(super) fn solve_variants(&mut self) {
        if self.link.is_busy() || self.history.is_open() || self.link.is_stale(&self.case()) {
            return;
        }
        let lacking = self.project.variants.iter().find(|v| {
            !self.kept.iter().any(|k| k.0 == v.name) && !self.unsolvable.contains(&v.name)
        });
        if let Some(variant) = lacking {
            let case = self.case_of(variant);
            let sound = case.design.faults().is_empty() && case.run.faults().is_empty();
            let name = variant.name.clone();
            if sound {
                self.link.want_aside(&name, case);
            } else {
                self.unsolvable.push(name);
            }
        }
    }

    /// Remove a kept variant with its figures.
    pub(super) fn forget_variant(&mut self, which: usize) {
        let name = self.project.variants.remove(which).name;
        self.kept.retain(|k| k.0 != name);
        self.unsolvable.retain(|n| *n != name);
        if self.compared.as_ref() == Some(&name) {
            self.compared = None;
        }
    }

    /// Figures of a kept variant, once known.
    pub fn variant_figures(&self, name: &str) -> Option<&SolveReport> {
        self.kept.iter().find(|k| k.0 == name).map(|k| &*k.1)
    }
}
