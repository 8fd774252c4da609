//! The documented example is the format: it is read, round-trips, and every key of the types stands in the document.

use flumeloft::study::Project;

fn example() -> String {
    let document = include_str!("../docs/project-file.md");
    let start = document.find("```json").unwrap() + 7;
    let end = start + document[start..].find("```").unwrap();
    let lines = document[start..end]
        .lines()
        .filter(|l| !l.trim_start().starts_with("//"));
    lines.collect::<Vec<_>>().join("\n")
}

#[test]
fn the_documented_example_is_read_and_round_trips() {
    let project = Project::from_json(&example()).unwrap();
    assert_eq!(project.faults(), vec![]);
    let again = Project::from_json(&project.to_json().unwrap()).unwrap();
    assert_eq!(project, again);
}

#[test]
fn an_unknown_key_in_the_example_is_refused_with_its_name() {
    let text = example().replace("\"frozen\": false", "\"frosen\": false");
    let error = Project::from_json(&text).unwrap_err().to_string();
    assert!(error.contains("frosen"), "{error}");
}

#[test]
fn every_key_of_the_types_is_documented() {
    let document = include_str!("../docs/project-file.md");
    let sources = [
        include_str!("../src/study/design.rs"),
        include_str!("../src/physics/conditions.rs"),
        include_str!("../src/physics/fluid.rs"),
    ];
    let mut seen = 0;
    for source in sources {
        for line in source.lines().map(str::trim) {
            let name = line.strip_prefix("pub ").unwrap_or(line);
            let Some((key, _)) = name.split_once(": ") else {
                continue;
            };
            let is_key = key
                .chars()
                .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_');
            if is_key
                && line.ends_with(',')
                && !line.contains("Self")
                && !line.contains("::default")
            {
                assert!(document.contains(key), "the key {key} is not documented");
                seen += 1;
            }
        }
    }
    assert!(seen > 40, "{seen} keys");
}
