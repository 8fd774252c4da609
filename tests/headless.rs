//! The built program, in a fresh folder: one fact a test.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn samples() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("sample_projects")
}

fn run(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_flumeloft"))
        .args(arguments)
        .current_dir(folder)
        .output()
        .unwrap()
}

/// A coarse copy of a sample, so that tests are quick.
fn quick(folder: &Path, sample: &str, steps: usize) -> String {
    let text = std::fs::read_to_string(samples().join(sample)).unwrap();
    let mut json: serde_json::Value = serde_json::from_str(&text).unwrap();
    json["run"]["accuracy"] = "draft".into();
    json["run"]["order"] = 3.into();
    json["run"]["steps"] = steps.into();
    std::fs::write(folder.join(sample), json.to_string()).unwrap();
    sample.into()
}

fn words(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

#[test]
fn every_sample_checks_and_solves_with_closed_balances() {
    let folder = tempfile::tempdir().unwrap();
    for entry in std::fs::read_dir(samples()).unwrap() {
        let path = entry.unwrap().path();
        let file = path.to_str().unwrap();
        assert_eq!(
            run(folder.path(), &["check", file]).status.code(),
            Some(0),
            "{file}"
        );
        let out = run(folder.path(), &["solve", file, "--json", "-"]);
        assert_eq!(out.status.code(), Some(0), "{file}: {}", words(&out.stderr));
        let report: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
        assert!(report["balance"]["mass_relative"].as_f64().unwrap().abs() < 1e-8);
        assert!(report["balance"]["heat_relative"].as_f64().unwrap().abs() < 1e-3);
        assert!(report["balance"]["energy_relative"].as_f64().unwrap().abs() < 2e-3);
        assert!(report["balance"]["area_relative"].as_f64().unwrap().abs() < 1e-5);
    }
}

#[test]
fn bad_input_is_one_sentence_and_exit_2() {
    let folder = tempfile::tempdir().unwrap();
    let good = std::fs::read_to_string(samples().join("air_tube.json")).unwrap();
    for (name, text) in [
        ("empty", String::new()),
        ("cut", "{".into()),
        ("list", "[]".into()),
        ("null", "null".into()),
        (
            "key",
            good.replacen("\"version\"", "\"no_such_key\": 1, \"version\"", 1),
        ),
        (
            "new",
            good.replacen("\"version\": 1", "\"version\": 1000000", 1),
        ),
        ("nan", good.replacen("0.07", "NaN", 1)),
        ("deep", "[".repeat(100_000)),
        (
            "crossing",
            good.replacen("\"to_m\": [0.07, 0.0]", "\"to_m\": [0.0, 0.02]", 1),
        ),
    ] {
        std::fs::write(folder.path().join(name), text).unwrap();
        for verb in ["solve", "check", "improve"] {
            let out = run(folder.path(), &[verb, name]);
            assert_eq!(
                out.status.code(),
                Some(2),
                "{verb} {name}: {}",
                words(&out.stderr)
            );
            assert!(
                out.stdout.is_empty() && !out.stderr.is_empty(),
                "{verb} {name}"
            );
            assert!(!words(&out.stderr).contains("panicked"), "{verb} {name}");
        }
    }
    assert_eq!(
        run(folder.path(), &["solve", "missing.json"]).status.code(),
        Some(2)
    );
    assert_eq!(run(folder.path(), &["frobnicate"]).status.code(), Some(2));
}

#[test]
fn improve_gains_repeats_and_writes_its_files() {
    let folder = tempfile::tempdir().unwrap();
    let file = quick(folder.path(), "air_tube.json", 8);
    let mut reports = Vec::new();
    for out in ["one", "two"] {
        let json = format!("{out}.json");
        let done = run(
            folder.path(),
            &["improve", &file, "--out", out, "--json", &json],
        );
        assert_eq!(done.status.code(), Some(0), "{}", words(&done.stderr));
        let text = std::fs::read_to_string(folder.path().join(json)).unwrap();
        let mut report: serde_json::Value = serde_json::from_str(&text).unwrap();
        for side in ["start", "final"] {
            report[side]["seconds"] = serde_json::Value::Null;
        }
        reports.push(report);
    }
    assert_eq!(
        reports[0], reports[1],
        "equal input must give equal output to the last digit"
    );
    let heat = |side: &str| reports[0][side]["heat_w_m"].as_f64().unwrap();
    assert!(
        heat("final") > 1.15 * heat("start"),
        "{} to {}",
        heat("start"),
        heat("final")
    );
    assert!(reports[0]["gradient_check"].as_f64().unwrap() < 1e-5);
    for limit in reports[0]["limits"].as_array().unwrap() {
        let (slack, bound) = (
            limit["slack"].as_f64().unwrap(),
            limit["bound"].as_f64().unwrap(),
        );
        assert!(slack >= -1e-9 * bound.abs(), "{limit}");
    }
    let names: Vec<String> = std::fs::read_dir(folder.path().join("one"))
        .unwrap()
        .map(|e| e.unwrap().file_name().to_string_lossy().into_owned())
        .collect();
    for ending in [".csv", ".json", ".png", ".txt"] {
        assert!(
            names.iter().any(|n| n.ends_with(ending)),
            "{ending} of {names:?}"
        );
    }
    let project = names.iter().find(|n| n.ends_with(".json")).unwrap();
    let improved = folder.path().join("one").join(project);
    assert_eq!(
        run(folder.path(), &["check", improved.to_str().unwrap()])
            .status
            .code(),
        Some(0)
    );
}

#[test]
fn a_contour_list_is_read_back_within_its_tolerance() {
    use flumeloft::geometry::coordinate_list::CoordinateList;
    use flumeloft::geometry::fit::closed_spline;
    let folder = tempfile::tempdir().unwrap();
    let sample = samples().join("oil_bend_vane.json");
    for unit in ["mm", "m"] {
        let out = run(
            folder.path(),
            &[
                "contour",
                sample.to_str().unwrap(),
                "--chord-mm",
                "0.002",
                "--unit",
                unit,
                "-o",
                "list.txt",
            ],
        );
        assert_eq!(out.status.code(), Some(0), "{}", words(&out.stderr));
        let text = std::fs::read_to_string(folder.path().join("list.txt")).unwrap();
        let list = CoordinateList::read(&text).unwrap();
        let project = flumeloft::study::Project::load(&sample).unwrap();
        let contour = project.design.inserts[0].contour();
        let worst = list
            .points_m
            .iter()
            .map(|&p| contour.nearest(p).1.distance(p))
            .fold(0.0, f64::max);
        assert!(worst < 2e-6, "listed points off the contour by {worst}");
        let fitted = closed_spline(&list.points_m, Some(4e-6));
        let back = contour
            .samples(20)
            .iter()
            .map(|&p| fitted.spline.nearest(p).1.distance(p))
            .fold(0.0, f64::max);
        assert!(back < 8e-6, "fitted back to {back}");
    }
}

#[test]
fn a_list_is_imported_as_an_insert() {
    let folder = tempfile::tempdir().unwrap();
    let sample = samples().join("water_pin.json");
    let file = sample.to_str().unwrap();
    let out = run(
        folder.path(),
        &["contour", file, "--chord-mm", "0.001", "-o", "list.txt"],
    );
    assert_eq!(out.status.code(), Some(0));
    let out = run(
        folder.path(),
        &[
            "import",
            file,
            "list.txt",
            "--insert",
            "pin",
            "-o",
            "again.json",
        ],
    );
    assert_eq!(out.status.code(), Some(0), "{}", words(&out.stderr));
    let before = flumeloft::study::Project::load(&sample)
        .unwrap()
        .design
        .inserts[0]
        .contour();
    let after = flumeloft::study::Project::load(&folder.path().join("again.json"))
        .unwrap()
        .design
        .inserts[0]
        .contour();
    assert!(
        (after.area() / before.area() - 1.0).abs() < 3e-3,
        "{} {}",
        after.area(),
        before.area()
    );
    let overlap = run(
        folder.path(),
        &["import", file, "list.txt", "-o", "twice.json"],
    );
    assert_eq!(
        overlap.status.code(),
        Some(2),
        "a second insert on top of the first must be refused"
    );
    assert!(overlap.stdout.is_empty());
}

#[test]
fn too_small_a_budget_is_told() {
    let folder = tempfile::tempdir().unwrap();
    let text = std::fs::read_to_string(samples().join("air_tube.json")).unwrap();
    let mut json: serde_json::Value = serde_json::from_str(&text).unwrap();
    json["run"]["most_triangles"] = 60.into();
    std::fs::write(folder.path().join("small.json"), json.to_string()).unwrap();
    let out = run(folder.path(), &["solve", "small.json"]);
    assert_eq!(out.status.code(), Some(2));
    assert!(
        words(&out.stderr).contains("triangles"),
        "{}",
        words(&out.stderr)
    );
}
