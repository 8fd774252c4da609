//! An engine without physics, for tests of the worker, the window and the reports: it answers at once with
//! made-up but repeatable figures, and says so in a warning.

use super::{
    Balance, Case, Caution, CautionLevel, Design, Engine, Failure, FieldSnapshot, Improved,
    InsertReport, LimitReport, SolveReport, Solved, StepRecord, StopReason,
};
use crate::base::{Vec2, Watch, vec2};
use std::sync::Arc;
use std::time::Duration;

/// How the stand-in behaves.
#[derive(Clone, Debug, Default)]
pub struct StandIn {
    /// Iterations of an improvement; the case's own step limit when none.
    pub steps: Option<usize>,
    /// Pause in each solve and iteration; the watch is read every millisecond.
    pub pause: Duration,
    /// Panic at this iteration (or in any solve, for 0).
    pub panic_at: Option<usize>,
    /// Answer each solve with this.
    pub failure: Option<Failure>,
}

impl StandIn {
    fn rest(&self, watch: &Watch) -> bool {
        let slice = Duration::from_millis(1);
        let mut left = self.pause;
        while !watch.is_stopped() && left > Duration::ZERO {
            std::thread::sleep(slice.min(left));
            left = left.saturating_sub(slice);
        }
        !watch.is_stopped()
    }

    fn solved(&self, case: &Case) -> Solved {
        let report = made_up_report(&case.design);
        Solved {
            case: case.clone(),
            aim_value: report.heat_w_m,
            limits: vec![LimitReport {
                name: "area of the inserts".into(),
                unit: "m^2".into(),
                value: report.inserts.iter().map(|i| i.area_m2).sum(),
                bound: 0.0,
                slack: 0.0,
                active: true,
            }],
            snapshot: Arc::new(made_up_picture(&case.design)),
            report,
        }
    }
}

impl Engine for StandIn {
    fn solve(&mut self, case: &Case, watch: &Watch) -> Result<Solved, Failure> {
        watch.tell("standing in", 0.5);
        assert!(self.panic_at != Some(0), "stand-in was told to panic");
        if let Some(failure) = &self.failure {
            return Err(failure.clone());
        }
        if !self.rest(watch) {
            return Err(Failure::Stopped);
        }
        Ok(self.solved(case))
    }

    fn improve(
        &mut self,
        case: &Case,
        watch: &Watch,
        progress: &mut dyn FnMut(StepRecord),
    ) -> Result<Improved, Failure> {
        if let Some(failure) = &self.failure {
            return Err(failure.clone());
        }
        let start = self.solved(case);
        let mut best = start.clone();
        let mut history = Vec::new();
        let most = self.steps.unwrap_or(case.run.steps);
        let mut stop = StopReason::StepLimit;
        for step in 0..=most {
            assert!(
                step == 0 || self.panic_at != Some(step),
                "stand-in was told to panic"
            );
            if !self.rest(watch) {
                stop = StopReason::StoppedByUser;
                break;
            }
            if step > 0 {
                best = self.solved(&slimmer(&best.case));
            }
            let record = StepRecord {
                step,
                evaluations: step + 1,
                accepted: true,
                aim_value: best.aim_value,
                violation: 0.0,
                limits: best.limits.clone(),
                inserts_m: (best.case.design.inserts.iter())
                    .map(|i| i.points_m.clone())
                    .collect(),
                step_length_m: 1e-5,
                trust_radius_m: 1e-4,
                stationarity: 1.0 / (step + 1) as f64,
                note: "stand-in".into(),
                report: Some(Arc::new(best.report.clone())),
                snapshot: Some(Arc::clone(&best.snapshot)),
            };
            history.push(record.clone());
            progress(record);
        }
        Ok(Improved {
            start,
            steps: history.len().saturating_sub(1),
            evaluations: history.len(),
            best,
            history,
            stop,
            stop_sentence: format!("the stand-in ended: {stop:?}"),
            gradient_check: 0.0,
        })
    }
}

/// Free inserts drawn out along x and thinned along y by a per mille.
fn slimmer(case: &Case) -> Case {
    let mut design = Design::clone(&case.design);
    for insert in design.inserts.iter_mut().filter(|i| !i.frozen) {
        let n = insert.points_m.len() as f64;
        let centre = insert.points_m.iter().fold(Vec2::ZERO, |s, &p| s + p) / n;
        for p in &mut insert.points_m {
            let r = *p - centre;
            *p = centre + vec2(r.x * 1.001, r.y / 1.001);
        }
    }
    Case {
        design: Arc::new(design),
        run: case.run.clone(),
    }
}

fn polygon_area(points: &[Vec2]) -> f64 {
    let next = points.iter().cycle().skip(1);
    0.5 * points
        .iter()
        .zip(next)
        .map(|(p, q)| p.cross(*q))
        .sum::<f64>()
}

fn made_up_report(design: &Design) -> SolveReport {
    let inserts: Vec<InsertReport> = design
        .inserts
        .iter()
        .map(|insert| {
            let next = insert.points_m.iter().cycle().skip(1);
            let perimeter_m = insert
                .points_m
                .iter()
                .zip(next)
                .map(|(p, q)| p.distance(*q))
                .sum();
            InsertReport {
                name: insert.name.clone(),
                heat_w_m: 1e3 * perimeter_m,
                drag_n_m: 1e-3,
                lift_n_m: 0.0,
                max_temperature_k: 340.0,
                mean_temperature_k: 340.0,
                area_m2: polygon_area(&insert.points_m),
                perimeter_m,
                min_gap_m: 1e-3,
                min_radius_m: 1e-3,
                min_thickness_m: 1e-3,
            }
        })
        .collect();
    SolveReport {
        triangles: 200,
        unknowns: 2000,
        newton_steps: 5,
        seconds: Default::default(),
        flow_rate_m2_s: 1e-3,
        mean_velocity_m_s: 0.1,
        reynolds: 100.0,
        static_pressure_drop_pa: 0.1,
        total_pressure_drop_pa: 0.12,
        pumping_power_w_m: 1.2e-4,
        heat_w_m: inserts.iter().map(|i| i.heat_w_m).sum(),
        wall_heat_w_m: 0.0,
        outlet_bulk_temperature_k: 310.0,
        max_speed_m_s: 0.2,
        max_temperature_k: 340.0,
        inserts,
        balance: Balance::default(),
        cautions: vec![Caution {
            level: CautionLevel::Warning,
            text: "These figures come from a stand-in for the engine and mean nothing.".into(),
            place_m: None,
        }],
    }
}

/// Cells across the drawing's height in the made-up picture.
const ROWS: usize = 24;

/// A grid over the duct's corners with a smooth warm spot round each insert.
fn made_up_picture(design: &Design) -> FieldSnapshot {
    let corners: Vec<Vec2> = design.duct.iter().map(|p| p.to_m).collect();
    let (mut low, mut high) = (vec2(f64::MAX, f64::MAX), vec2(f64::MIN, f64::MIN));
    for p in &corners {
        low = vec2(low.x.min(p.x), low.y.min(p.y));
        high = vec2(high.x.max(p.x), high.y.max(p.y));
    }
    let size = high - low;
    if corners.len() < 3 || !(size.x > 0.0 && size.y > 0.0) {
        return FieldSnapshot::default();
    }
    let columns = ((size.x / size.y * ROWS as f64) as usize).clamp(1, 20 * ROWS);
    let mut picture = FieldSnapshot::default();
    for j in 0..=ROWS {
        for i in 0..=columns {
            let (s, t) = (i as f64 / columns as f64, j as f64 / ROWS as f64);
            let p = low + vec2(size.x * s, size.y * t);
            let warmth: f64 = design
                .inserts
                .iter()
                .filter_map(|insert| insert.points_m.first())
                .map(|c| (-(p - *c).norm_squared() / (0.1 * size.y * size.x)).exp())
                .sum();
            let speed = 4.0 * t * (1.0 - t);
            picture.points_m.push([p.x as f32, p.y as f32]);
            picture.temperature_k.push((293.15 + 40.0 * warmth) as f32);
            picture.velocity_m_s.push([speed as f32, 0.0]);
            picture.pressure_pa.push((1.0 - s) as f32);
            picture
                .total_pressure_pa
                .push((1.0 - s + 0.5 * speed * speed) as f32);
        }
    }
    let at = |i: usize, j: usize| (j * (columns + 1) + i) as u32;
    for j in 0..ROWS {
        for i in 0..columns {
            let centre = low
                + vec2(
                    size.x * (i as f64 + 0.5) / columns as f64,
                    size.y * (j as f64 + 0.5) / ROWS as f64,
                );
            let solid = design.inserts.iter().any(|s| encloses(&s.points_m, centre));
            if encloses(&corners, centre) && !solid {
                let (a, b, c, d) = (at(i, j), at(i + 1, j), at(i + 1, j + 1), at(i, j + 1));
                picture.triangles.extend([[a, b, c], [a, c, d]]);
                picture.cell_lines.extend([[a, b], [a, d]]);
            }
        }
    }
    picture.fluid_triangles = picture.triangles.len();
    picture
}

/// Even-odd rule.
fn encloses(polygon: &[Vec2], p: Vec2) -> bool {
    let next = polygon.iter().cycle().skip(1);
    let crossings = polygon.iter().zip(next).filter(|(a, b)| {
        (a.y > p.y) != (b.y > p.y) && p.x < a.x + (b.x - a.x) * (p.y - a.y) / (b.y - a.y)
    });
    crossings.count() % 2 == 1
}
