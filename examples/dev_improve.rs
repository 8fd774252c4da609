//! dev
use flumeloft::base::*;
use flumeloft::geometry::*;
use flumeloft::physics::*;
use flumeloft::study::*;
use std::sync::Arc;
fn main() {
    let c = [
        vec2(0.0, 0.0),
        vec2(0.07, 0.0),
        vec2(0.07, 0.01),
        vec2(0.0, 0.01),
    ];
    let names = ["floor", "outlet", "ceiling", "inlet"];
    let duct = (0..4)
        .map(|i| DuctPiece {
            name: names[i].into(),
            to_m: c[(i + 1) % 4],
            shape: PieceShape::Line {},
            flow: match i {
                1 => FlowCondition::StaticPressure { pressure_pa: 0.0 },
                3 => FlowCondition::TotalPressure { pressure_pa: 0.06 },
                _ => FlowCondition::Wall {},
            },
            thermal: if i == 3 {
                ThermalCondition::FixedTemperature {
                    temperature_k: 300.0,
                }
            } else {
                ThermalCondition::Adiabatic {}
            },
        })
        .collect();
    let points = Starter::Circle { diameter_m: 0.004 }.controls(vec2(0.02, 0.005), 0.0, 20);
    let area = ClosedSpline::new(points.clone()).area();
    let design = Design {
        fluid: Fluid {
            name: "air".into(),
            density_kg_m3: 1.177,
            viscosity_pa_s: 1.846e-5,
            conductivity_w_m_k: 0.0263,
            heat_capacity_j_kg_k: 1007.0,
        },
        duct,
        inserts: vec![Insert {
            name: "tube".into(),
            points_m: points,
            frozen: false,
            thermal: ThermalCondition::FixedTemperature {
                temperature_k: 340.0,
            },
        }],
        aim: Aim::MostHeat {},
        limits: vec![
            Limit::Area {
                insert: None,
                equal_m2: None,
                at_least_m2: Some(area),
                at_most_m2: None,
            },
            Limit::WallGap {
                insert: None,
                at_least_m: 0.0015,
            },
            Limit::CurvatureRadius {
                insert: None,
                at_least_m: 0.0004,
            },
            Limit::Thickness {
                insert: None,
                at_least_m: 0.001,
            },
            Limit::BoundingBox {
                insert: None,
                lower_left_m: vec2(0.012, 0.001),
                upper_right_m: vec2(0.03, 0.009),
            },
        ],
    };
    let steps = std::env::args()
        .nth(1)
        .and_then(|s| s.parse().ok())
        .unwrap_or(30);
    let case = Case {
        design: Arc::new(design),
        run: RunSettings {
            steps,
            ..Default::default()
        },
    };
    let start = std::time::Instant::now();
    let mut engine = new_engine();
    match engine.improve(&case, &Watch::idle(), &mut |r| {
        println!("{:5.2}s {:2} ev {:3} {} heat {:.4} viol {:.1e} step {:.3} mm reach {:.3} mm stat {:.1e} {}", start.elapsed().as_secs_f64(), r.step, r.evaluations, if r.accepted {"+"} else {"-"}, r.aim_value, r.violation, r.step_length_m*1e3, r.trust_radius_m*1e3, r.stationarity, r.note);
    }) {
        Ok(i) => {
            println!("start {:.4} Re {:.1} -> final {:.4} ({:+.1} %) {:?} {} check {:.1e} ev {}", i.start.report.heat_w_m, i.start.report.reynolds, i.best.report.heat_w_m, 100.0*(i.best.report.heat_w_m/i.start.report.heat_w_m-1.0), i.stop, i.stop_sentence, i.gradient_check, i.evaluations);
            for l in &i.best.limits { println!("  {} {:.6e} bound {:.6e} slack {:.2e} {}", l.name, l.value, l.bound, l.slack, l.active); }
            println!("{:?}", i.start.report.seconds);
            for c in &i.best.report.cautions { println!("{:?} {}", c.level, c.text); }
            for p in &i.best.case.design.inserts[0].points_m { println!("{:.4} {:.4}", p.x*1e3, p.y*1e3); }
        }
        Err(e) => println!("{e}"),
    }
}
