//! Keeps the rooms: which layer may name which, where the window library, threads, clocks and printing may stand,
//! and how long a file may grow. Each rule is proved by a planted violation.

use std::path::{Path, PathBuf};

/// Layers and what each may use.
const LAYERS: [(&str, &[&str]); 12] = [
    ("base", &[]),
    ("geometry", &["base"]),
    ("linalg", &["base"]),
    ("mesh", &["base", "geometry", "linalg"]),
    ("optimise", &["base", "linalg"]),
    ("fem", &["base", "linalg", "mesh", "geometry"]),
    ("physics", &["base", "linalg", "mesh", "fem", "geometry"]),
    (
        "sensitivity",
        &["base", "geometry", "linalg", "mesh", "fem", "physics"],
    ),
    (
        "study",
        &[
            "base",
            "geometry",
            "linalg",
            "mesh",
            "fem",
            "physics",
            "sensitivity",
            "optimise",
        ],
    ),
    ("report", &["base", "geometry", "physics", "study"]),
    ("cli", &["base", "geometry", "study", "report"]),
    ("app", &["base", "geometry", "physics", "study", "report"]),
];

/// Longest file: one that a stranger still holds in mind.
const MOST_LINES: usize = 700;

/// What is wrong with a file of a layer, if anything.
fn fault(layer: &str, name: &str, text: &str) -> Option<String> {
    let allowed = LAYERS
        .iter()
        .find(|l| l.0 == layer)
        .map_or(&[][..], |l| l.1);
    let code: Vec<&str> = text
        .lines()
        .map(|l| l.split("//").next().unwrap_or(""))
        .collect();
    let test_from = code
        .iter()
        .position(|l| l.contains("#[cfg(test)]"))
        .unwrap_or(code.len());
    for (i, line) in code.iter().enumerate() {
        let at = |what: &str| Some(format!("{name}:{}: {what}", i + 1));
        for (other, _) in LAYERS {
            let named = line.contains(&format!("crate::{other}::"))
                || line.contains(&format!("crate::{other};"));
            if named && other != layer && !allowed.contains(&other) {
                return at(&format!("{layer} must not use {other}"));
            }
        }
        if (line.contains("egui") || line.contains("eframe")) && layer != "app" {
            return at("the window library belongs to app");
        }
        let threads = line.contains("std::thread") && i < test_from;
        let at_home = name.contains("worker")
            || name.contains("mailbox")
            || name.ends_with("parallel.rs")
            || name.ends_with("persist.rs");
        if threads && !at_home && !name.contains("stand_in") {
            return at("threads belong to the worker, the element loops and the file dialogue");
        }
        let prints = ["println!", "print!(", "eprintln!", "dbg!("]
            .iter()
            .any(|p| line.contains(p));
        if prints && layer != "cli" && i < test_from {
            return at("printing belongs to cli");
        }
        let clock = line.contains("Instant") || line.contains("SystemTime");
        if clock && !["study", "report", "cli", "app"].contains(&layer) && i < test_from {
            return at("no clock below study");
        }
    }
    (code.len() > MOST_LINES)
        .then(|| format!("{name} has {} lines: is it one room or two?", code.len()))
}

fn files(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            found.extend(files(&path));
        } else if path.extension().is_some_and(|e| e == "rs") {
            found.push(path);
        }
    }
    found.sort();
    found
}

#[test]
fn rooms_are_kept() {
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut faults = Vec::new();
    for (layer, _) in LAYERS {
        for path in files(&source.join(layer)) {
            let name = path
                .strip_prefix(&source)
                .unwrap()
                .to_string_lossy()
                .into_owned();
            faults.extend(fault(
                layer,
                &name,
                &std::fs::read_to_string(&path).unwrap(),
            ));
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn each_planted_violation_is_seen() {
    for (layer, text) in [
        ("geometry", "use crate::physics::State;"),
        ("optimise", "use crate::mesh::CurvedMesh;"),
        ("study", "fn f(ui: &mut egui::Ui) {}"),
        ("mesh", "std::thread::spawn(|| {});"),
        ("study", "println!(\"x\");"),
        ("fem", "let t = std::time::Instant::now();"),
    ] {
        assert!(
            fault(layer, "planted.rs", text).is_some(),
            "{layer}: {text}"
        );
    }
    assert!(fault("base", "long.rs", &"\n".repeat(MOST_LINES + 2)).is_some());
    assert!(
        fault(
            "mesh",
            "fine.rs",
            "use crate::geometry::Curve; // see crate::physics::State"
        )
        .is_none()
    );
}
