//! The studio without a display: what a designer does, read through its state.

use egui_kittest::Harness;
use flumeloft::app::command::Command;
use flumeloft::app::persist::{Purpose, Settings};
use flumeloft::app::words::{Edit, Gesture};
use flumeloft::app::{SAMPLES, Studio};
use flumeloft::base::vec2;
use flumeloft::study::{Accuracy, Project};
use std::sync::Once;
use std::time::Duration;

static HOME: Once = Once::new();

/// The air sample, coarse.
fn quick() -> Project {
    let mut project = Project::from_json(SAMPLES[0].1).unwrap();
    project.run.accuracy = Accuracy::Draft;
    project.run.order = 3;
    project.run.steps = 3;
    project
}

fn open(project: Project) -> Harness<'static, Studio> {
    HOME.call_once(|| {
        let folder =
            std::env::temp_dir().join(format!("flumeloft-studio-test-{}", std::process::id()));
        // Settings and sessions of the tests stay out of the user's own folder. Set before any studio exists.
        #[expect(
            unsafe_code,
            reason = "the environment is set once, before any thread of a studio runs"
        )]
        unsafe {
            std::env::set_var("XDG_CONFIG_HOME", folder);
        }
    });
    let studio = Studio::new(project, None, Settings::default(), || {});
    Harness::builder()
        .with_size(egui::vec2(1440.0, 900.0))
        .build_ui_state(
            |ui, studio: &mut Studio| {
                let ctx = ui.ctx().clone();
                studio.logic(&ctx);
                studio.ui(ui);
            },
            studio,
        )
}

/// Step until a state is reached.
fn until(harness: &mut Harness<'static, Studio>, what: &str, done: impl Fn(&Studio) -> bool) {
    for _ in 0..6000 {
        harness.step();
        if done(harness.state()) {
            return;
        }
        std::thread::sleep(Duration::from_millis(10));
    }
    panic!("{what} was not reached");
}

fn solved(studio: &Studio) -> bool {
    studio.figures().is_some_and(|f| !f.1)
}

fn heat(studio: &Studio) -> f64 {
    studio.figures().map_or(f64::NAN, |f| f.0.heat_w_m)
}

#[test]
fn the_first_sample_is_solved_and_a_drag_changes_its_figures() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let before = heat(harness.state());
    let design = harness.state().project().design.clone();
    for _ in 0..3 {
        harness.step();
    }
    let place = harness
        .state()
        .screen_from_world(design.inserts[0].points_m[0])
        .unwrap();
    harness.hover_at(place);
    harness.step();
    harness.drag_at(place);
    harness.step();
    for k in 1..=6 {
        harness.hover_at(place + egui::vec2(3.0 * k as f32, 0.0));
        harness.step();
    }
    assert_ne!(
        harness.state().project().design,
        design,
        "the drag must move the point"
    );
    assert!(
        !solved(harness.state()),
        "figures of an older drawing must be marked as such"
    );
    harness.drop_at(place + egui::vec2(18.0, 0.0));
    until(&mut harness, "the new state", solved);
    assert_ne!(heat(harness.state()), before);
    assert_eq!(harness.state().undo_name(), Some("move point"));
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Undo);
    assert_eq!(
        harness.state().project().design,
        design,
        "one drag is one undo"
    );
    harness.state_mut().dispatch(&ctx, Command::Redo);
    assert_ne!(harness.state().project().design, design);
}

#[test]
fn improve_watches_adopts_and_keeps_the_start() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let before = heat(harness.state());
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Improve);
    assert!(harness.state().is_improving());
    until(&mut harness, "the end of the run", |s| !s.is_improving());
    assert!(heat(harness.state()) > 1.02 * before && solved(harness.state()));
    assert_eq!(harness.state().undo_name(), Some("improve"));
    assert_eq!(
        harness.state().project().variants[0].name,
        "before improving"
    );
    let folder = tempfile::tempdir().unwrap();
    for (purpose, name) in [
        (Purpose::Contour, "c.txt"),
        (Purpose::Picture, "p.png"),
        (Purpose::History, "h.csv"),
        (Purpose::SaveAs, "s.json"),
    ] {
        let path = folder.path().join(name);
        harness.state_mut().answered(purpose, &path);
        assert!(
            std::fs::metadata(&path).is_ok_and(|m| m.len() > 100),
            "{name}"
        );
    }
    assert!(!harness.state().is_dirty());
    harness
        .state_mut()
        .answered(Purpose::Import, &folder.path().join("c.txt"));
    assert_eq!(harness.state().project().design.inserts.len(), 2);
}

#[test]
fn a_stop_is_answered_and_keeps_the_best() {
    let mut project = quick();
    project.run.steps = 100;
    let mut harness = open(project);
    until(&mut harness, "the first state", solved);
    let before = heat(harness.state());
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Improve);
    until(&mut harness, "some steps", |s| {
        s.figures().is_some() && s.steps_taken() > 2
    });
    harness.state_mut().dispatch(&ctx, Command::Stop);
    until(&mut harness, "the stop", |s| !s.is_improving());
    assert!(heat(harness.state()) > before);
}

#[test]
fn faults_are_marked_and_nothing_wrong_is_solved() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let out = Edit::MoveControl {
        insert: 0,
        control: 0,
        to_m: vec2(0.02, 0.05),
    };
    harness.state_mut().edit(&Gesture {
        edit: out,
        finished: true,
    });
    for _ in 0..5 {
        harness.step();
    }
    assert!(!solved(harness.state()));
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Improve);
    assert!(
        !harness.state().is_improving(),
        "a faulty drawing is not improved"
    );
    harness.state_mut().dispatch(&ctx, Command::Undo);
    until(&mut harness, "the mended drawing's state", solved);
}

#[test]
fn every_command_runs_and_a_broken_file_changes_nothing() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let ctx = harness.ctx.clone();
    for command in Command::ALL {
        harness.state_mut().dispatch(&ctx, command);
        harness.step();
        harness.state_mut().dispatch(&ctx, Command::Stop);
    }
    until(&mut harness, "the end", |s| !s.is_improving());
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("broken.json");
    std::fs::write(&path, "{ \"version\": 1").unwrap();
    let before = harness.state().project().clone();
    harness.state_mut().answered(Purpose::Open, &path);
    assert_eq!(*harness.state().project(), before);
    harness.step();
}

#[test]
fn every_sample_opens_and_solves() {
    for (name, text) in SAMPLES {
        let mut project = Project::from_json(text).unwrap();
        project.run.accuracy = Accuracy::Draft;
        project.run.order = 3;
        let mut harness = open(project);
        until(&mut harness, name, solved);
        for _ in 0..2 {
            harness.step();
        }
    }
}
