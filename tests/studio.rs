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

/// Improve, and look back at the first step.
fn improved_and_looking_back(project: Project) -> Harness<'static, Studio> {
    let mut harness = open(project);
    until(&mut harness, "the first state", solved);
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Improve);
    until(&mut harness, "the end of the run", |s| !s.is_improving());
    harness.state_mut().look_at(Some(0));
    harness.step();
    harness
}

#[test]
fn improve_pressed_while_looking_back_starts_from_the_present_design() {
    let mut harness = improved_and_looking_back(quick());
    harness.key_press(egui::Key::F5);
    harness.step();
    assert!(harness.state().is_improving());
    until(&mut harness, "the end of the second run", |s| {
        !s.is_improving()
    });
    harness.step();
}

#[test]
fn opening_during_a_run_is_refused_and_the_run_goes_on() {
    let mut project = quick();
    project.run.steps = 100;
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("other.json");
    let mut other = quick();
    other.name = "another".into();
    other.save(&path).unwrap();
    let mut harness = open(project);
    until(&mut harness, "the first state", solved);
    let ctx = harness.ctx.clone();
    harness.state_mut().dispatch(&ctx, Command::Improve);
    until(&mut harness, "a step", |s| s.steps_taken() > 0);
    harness.state_mut().answered(Purpose::Open, &path);
    assert!(harness.state().is_improving());
    assert_ne!(harness.state().project().name, "another");
    harness.state_mut().dispatch(&ctx, Command::Stop);
    until(&mut harness, "the stop", |s| !s.is_improving());
    harness.state_mut().answered(Purpose::Open, &path);
    assert_eq!(harness.state().project().name, "another");
    assert!(
        harness.state().figures().is_none() && harness.state().steps_taken() == 0,
        "nothing of the old project is shown with the new one"
    );
    until(&mut harness, "the state of the other project", solved);
}

#[test]
fn a_step_goes_to_the_inserts_of_its_names_or_nowhere() {
    let mut harness = improved_and_looking_back(quick());
    let start = harness.state().project().variants[0].inserts[0].clone();
    // Another insert comes first now: by number the step would go to it.
    let mut design = harness.state().project().design.clone();
    let mut other = design.inserts[0].clone();
    other.name = "second".into();
    other.points_m.iter_mut().for_each(|p| p.x += 0.02);
    design.inserts.insert(0, other.clone());
    let replace = |to| Gesture {
        edit: Edit::Replace {
            to: Box::new(to),
            name: "test".into(),
        },
        finished: true,
    };
    harness.state_mut().edit(&replace(design.clone()));
    harness.state_mut().take_step(0, false);
    let now = &harness.state().project().design;
    assert_eq!(now.inserts[0], other);
    let apart = |a: &[flumeloft::base::Vec2]| {
        a.iter()
            .zip(&start.points_m)
            .map(|(p, q)| p.distance(*q))
            .fold(0.0, f64::max)
    };
    assert!(apart(&now.inserts[1].points_m) < 1e-14);
    // The insert of the run is gone: nothing changes.
    design.inserts.remove(1);
    design.limits.clear();
    harness.state_mut().edit(&replace(design.clone()));
    harness.state_mut().take_step(0, false);
    assert_eq!(harness.state().project().design, design);
    // As a variant it can still be kept, with its own name.
    harness.state_mut().take_step(0, true);
    let kept = harness.state().project().variants.last().unwrap();
    assert!(kept.inserts.len() == 1 && apart(&kept.inserts[0].points_m) < 1e-14);
}

#[test]
fn a_drag_that_does_not_rest_brings_figures_all_the_same() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let place = harness.state().project().design.inserts[0].points_m[0];
    let (mut news, mut last) = (0, heat(harness.state()));
    let since = std::time::Instant::now();
    // A new place in every frame for as long as it takes to see three results (a solve takes a fraction of a second).
    let mut k = 0;
    while news < 3 && since.elapsed() < Duration::from_secs(60) {
        k += 1;
        let edit = Edit::MoveControl {
            insert: 0,
            control: 0,
            to_m: place + vec2(1e-7 * f64::from(k % 500), 0.0),
        };
        harness.state_mut().edit(&Gesture {
            edit,
            finished: false,
        });
        harness.step();
        assert!(
            !solved(harness.state()) || news == 0,
            "older figures are marked"
        );
        if heat(harness.state()) != last {
            news += 1;
            last = heat(harness.state());
        }
        std::thread::sleep(Duration::from_millis(5));
    }
    assert_eq!(news, 3, "figures must follow the hand");
}

#[test]
fn variants_read_from_a_file_get_their_figures() {
    let mut project = quick();
    let mut inserts = project.design.inserts.clone();
    inserts[0].points_m.iter_mut().for_each(|p| p.x += 1e-3);
    project.variants.push(flumeloft::study::Variant {
        name: "further on".into(),
        inserts,
    });
    let mut harness = open(project);
    until(&mut harness, "the variant's figures", |s| {
        s.variant_figures("further on").is_some()
    });
    assert!(solved(harness.state()), "the drawing's own figures stay");
    let own = heat(harness.state());
    assert_ne!(
        harness
            .state()
            .variant_figures("further on")
            .unwrap()
            .heat_w_m,
        own
    );
}

#[test]
fn an_unsaved_session_is_kept_until_its_offer_is_answered() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("p.json");
    let mut project = quick();
    project.save(&path).unwrap();
    let nudge = |studio: &mut Studio, by: f64| {
        studio.edit(&Gesture {
            edit: Edit::MoveInsert {
                insert: 0,
                by_m: vec2(by, 0.0),
            },
            finished: true,
        });
        studio.autosave();
    };
    let start = || {
        Studio::new(
            Project::load(&path).unwrap(),
            Some(path.clone()),
            Settings::default(),
            || {},
        )
    };
    // The first session ends without saving (a crash), the second before it has answered the offer.
    let mut first = start();
    nudge(&mut first, 1e-4);
    let lost = first.project().clone();
    drop(first);
    let mut second = start();
    assert_eq!(second.offered_sessions().len(), 1);
    nudge(&mut second, 2e-4);
    let also_lost = second.project().clone();
    drop(second);
    // Both are still there, and can be taken up.
    let mut third = start();
    assert_eq!(third.offered_sessions().len(), 2);
    third.recover(0);
    let one = third.project().clone();
    assert!(third.is_dirty());
    third.recover(0);
    let two = third.project().clone();
    assert!([&one, &two].contains(&&lost) && [&one, &two].contains(&&also_lost));
    assert!(third.offered_sessions().is_empty());
    // Saved: nothing is offered any more but what was put off.
    third.answered(Purpose::SaveAs, &path);
    drop(third);
    let fourth = start();
    assert!(
        fourth.offered_sessions().len() <= 1,
        "the session put aside at recovery may be offered"
    );
    project.name.clear();
}

#[test]
fn another_file_is_replaced_only_after_a_question() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("taken.json");
    std::fs::write(&path, "precious").unwrap();
    harness.state_mut().propose(Purpose::SaveAs, &path);
    harness.step();
    assert_eq!(std::fs::read_to_string(&path).unwrap(), "precious");
    assert_eq!(harness.state().asks(), Some(true));
    harness.state_mut().answered(Purpose::SaveAs, &path);
    assert!(std::fs::read_to_string(&path).unwrap().starts_with('{'));
    // Its own file is saved without a question.
    harness.state_mut().propose(Purpose::SaveAs, &path);
    assert_eq!(harness.state().asks(), None);
}

#[test]
fn places_are_typed_and_nudged() {
    let mut harness = open(quick());
    until(&mut harness, "the first state", solved);
    for _ in 0..3 {
        harness.step();
    }
    let place = harness.state().project().design.inserts[0].points_m[0];
    let at = harness.state().screen_from_world(place).unwrap();
    harness.hover_at(at);
    harness.step();
    harness.drag_at(at);
    harness.step();
    harness.drop_at(at);
    harness.step();
    let point = |h: &Harness<'static, Studio>| h.state().project().design.inserts[0].points_m[0];
    let key = |h: &mut Harness<'static, Studio>, key| {
        h.key_press(key);
        h.step();
        h.step();
    };
    let before = point(&harness);
    for _ in 0..3 {
        key(&mut harness, egui::Key::ArrowRight);
    }
    let moved = point(&harness);
    assert!(
        moved.x > before.x && (moved.y - before.y).abs() < 1e-12,
        "{before:?} {moved:?}"
    );
    key(&mut harness, egui::Key::ArrowLeft);
    key(&mut harness, egui::Key::ArrowLeft);
    let back = point(&harness);
    assert!(
        ((moved.x - before.x) / (moved.x - back.x) - 1.5).abs() < 1e-6,
        "each press moves alike"
    );
    // Typed: wrong text is not taken and stays, right text moves the point.
    let type_place = |h: &mut Harness<'static, Studio>, text: &str| {
        key(h, egui::Key::Enter);
        h.event(egui::Event::Text(text.into()));
        h.step();
        key(h, egui::Key::Enter);
    };
    type_place(&mut harness, "12 kg; 3");
    assert_eq!(point(&harness), back);
    key(&mut harness, egui::Key::Escape);
    let to = vec2(before.x + 1e-4, before.y);
    type_place(
        &mut harness,
        &format!("{} mm, {} mm", to.x * 1e3, to.y * 1e3),
    );
    assert!(
        point(&harness).distance(to) < 1e-9,
        "{:?} {to:?}",
        point(&harness)
    );
    assert_eq!(harness.state().undo_name(), Some("move point"));
}
