//! Project files: what is read, what is refused and in which words.

use super::test_design::project;
use super::{FileError, Insert, Limit, Project, Variant};
use crate::base::vec2;
use crate::geometry::PieceShape;
use crate::physics::ThermalCondition;
use proptest::prelude::*;

fn text() -> String {
    project().to_json().expect("the test project is storable")
}

fn refusal(text: &str) -> String {
    Project::from_json(text).expect_err("refused").to_string()
}

/// The text with one place replaced, which must be there.
fn with(old: &str, new: &str) -> String {
    let text = text();
    assert!(text.contains(old), "{old} in\n{text}");
    text.replacen(old, new, 1)
}

#[test]
fn a_project_comes_back() {
    assert_eq!(Project::from_json(&text()).expect("reads"), project());
}

#[test]
fn a_point_is_one_line_and_nothing_is_ragged() {
    let text = text();
    assert!(
        text.contains("\n        \"to_m\": [0.07, 0.0],\n"),
        "{text}"
    );
    assert!(text.contains("\n          [0.022, 0.005],\n"), "{text}");
    assert!(text.contains("\n      \"kind\": \"most_heat\"\n"), "{text}");
    assert!(text.ends_with("\n  \"variants\": []\n}\n"), "{text}");
    assert!(text.lines().all(|line| line.trim_end() == line));
}

#[test]
fn unknown_keys_are_refused_with_their_place() {
    let place = |old: &str, new: &str| refusal(&with(old, new));
    assert!(
        place("\"version\": 1,", "\"version\": 1, \"colour\": 2,")
            .starts_with("project: unknown field `colour`")
    );
    assert!(
        place("\"density_kg_m3\"", "\"density\"")
            .starts_with("design.fluid: unknown field `density`")
    );
    let wall = "\"kind\": \"wall\"";
    assert!(
        place(wall, "\"kind\": \"wall\", \"roughness_m\": 0")
            .starts_with("design.duct[0].flow: unknown field `roughness_m`")
    );
    assert!(
        place(wall, "\"kind\": \"porous\"")
            .starts_with("design.duct[0].flow: unknown variant `porous`")
    );
    assert!(
        place("\"kind\": \"line\"", "\"kind\": \"line\", \"x\": 0")
            .starts_with("design.duct[0].shape: unknown field `x`")
    );
    assert!(
        place(
            "\"kind\": \"adiabatic\"",
            "\"kind\": \"adiabatic\", \"x\": 0"
        )
        .starts_with("design.duct[0].thermal: unknown field `x`")
    );
    assert!(
        place(
            "\"kind\": \"most_heat\"",
            "\"kind\": \"most_heat\", \"x\": 0"
        )
        .starts_with("design.aim: unknown field `x`")
    );
    assert!(
        place("\"kind\": \"area\"", "\"kind\": \"area\", \"x\": 0")
            .starts_with("design.limits[0]: unknown field `x`")
    );
    assert!(
        place("\"frozen\": false", "\"frozen\": false, \"x\": 0")
            .starts_with("design.inserts[0]: unknown field `x`")
    );
    assert!(place("\"order\"", "\"degree\"").starts_with("run: unknown field `degree`"));
}

#[test]
fn wrong_kinds_and_missing_keys_are_refused_with_their_place() {
    let place = |old: &str, new: &str| refusal(&with(old, new));
    assert!(place("[0.022, 0.005]", "[0.022]").starts_with("design.inserts[0].points_m[0]: "));
    assert!(
        place("[0.022, 0.005]", "[0.022, 0.005, 1.0]")
            .starts_with("design.inserts[0].points_m[0]: ")
    );
    assert!(
        place("[0.022, 0.005]", "[0.022, null]").starts_with("design.inserts[0].points_m[0]: ")
    );
    assert!(
        place("\"temperature_k\": 293.15", "\"temperature_c\": 20")
            .starts_with("design.duct[3].thermal: ")
    );
    assert!(place("\"order\": 4", "\"order\": -4").starts_with("run: "));
    assert!(place("\"aim\"", "\"goal\"").starts_with("design: "));
}

#[test]
fn keys_written_twice_are_refused() {
    assert!(
        refusal(&with("\"order\": 4", "\"order\": 4, \"order\": 4"))
            .contains("duplicate field `order`")
    );
    let twice = "\"name\": \"tube\", \"name\": \"tube\"";
    assert!(refusal(&with("\"name\": \"tube\"", twice)).contains("duplicate field `name`"));
}

#[test]
fn versions_other_than_this_are_refused() {
    let version = |v: &str| refusal(&with("\"version\": 1", &format!("\"version\": {v}")));
    assert!(version("1000000").contains("open it with the newer program"));
    assert!(version("0").contains("there never was such a format"));
    for v in ["-1", "1.5", "\"1\"", "null", "1e400"] {
        assert!(!version(v).is_empty());
    }
}

#[test]
fn text_that_is_no_project_is_refused() {
    for text in ["", "{", "[]", "null", "3", "\"x\"", "{}", "\u{feff}{}"] {
        assert!(!refusal(text).is_empty());
    }
    assert!(refusal(&("[".repeat(100_000) + &"]".repeat(100_000))).contains("recursion limit"));
    assert!(refusal(&with("0.022,", "NaN,")).contains("not valid JSON"));
    assert!(refusal(&with("0.022,", "1e999,")).contains("number out of range"));
}

#[test]
fn deep_nesting_inside_a_tagged_part_is_refused() {
    let deep = "{\"a\":".repeat(100_000) + "1" + &"}".repeat(100_000);
    assert!(
        refusal(&with("\"kind\": \"wall\"", &format!("\"kind\": {deep}"))).contains("recursion")
    );
}

#[test]
fn too_many_of_anything_is_refused() {
    let mut many = project();
    many.design.inserts[0].points_m = vec![vec2(0.0, 0.0); 501];
    let error = many.to_json().expect_err("refused").to_string();
    assert!(
        error.starts_with("design.inserts[0].points_m: has 501"),
        "{error}"
    );
    let mut many = project();
    many.design.duct = vec![many.design.duct[0].clone(); 501];
    assert!(matches!(
        many.to_json(),
        Err(FileError::TooMany { most: 500, .. })
    ));
}

#[test]
fn numbers_that_are_not_finite_are_not_written() {
    let mut project = project();
    project.design.inserts[0].points_m[3].y = f64::NAN;
    let error = project.to_json().expect_err("refused").to_string();
    assert!(
        error.starts_with("design.inserts[0].points_m[3]: "),
        "{error}"
    );
    let mut project = super::test_design::project();
    project.design.fluid.density_kg_m3 = f64::INFINITY;
    let error = project.to_json().expect_err("refused").to_string();
    assert!(error.starts_with("design.fluid: "), "{error}");
}

#[test]
fn saving_replaces_the_file_whole_and_leaves_nothing_else() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("study.json");
    std::fs::write(&path, "old").expect("written");
    project().save(&path).expect("saved");
    assert_eq!(Project::load(&path).expect("read"), project());
    assert_eq!(std::fs::read_dir(folder.path()).expect("listed").count(), 1);
    let nowhere = folder.path().join("none").join("study.json");
    assert!(matches!(
        project().save(&nowhere),
        Err(FileError::Unwritable { .. })
    ));
    assert!(matches!(
        Project::load(&nowhere),
        Err(FileError::Unreadable { .. })
    ));
    assert!(matches!(
        Project::load(folder.path()),
        Err(FileError::Unreadable { .. })
    ));
    std::fs::write(&path, [0x7b, 0xff, 0xfe]).expect("written");
    assert!(matches!(
        Project::load(&path),
        Err(FileError::NotText { byte: 2 })
    ));
}

/// Any finite number, also subnormal and negative zero.
fn number() -> impl Strategy<Value = f64> {
    any::<u64>()
        .prop_map(f64::from_bits)
        .prop_filter("finite", |x| x.is_finite())
}

fn bits(project: &Project) -> Vec<u64> {
    let design = &project.design;
    let mut all = vec![
        design.fluid.density_kg_m3,
        design.fluid.viscosity_pa_s,
        design.fluid.conductivity_w_m_k,
        design.fluid.heat_capacity_j_kg_k,
    ];
    let points = design.duct.iter().map(|p| p.to_m);
    let points = points.chain(design.inserts.iter().flat_map(|i| i.points_m.clone()));
    all.extend(points.flat_map(|p| [p.x, p.y]));
    for limit in &design.limits {
        if let Limit::Area { equal_m2, .. } = limit {
            all.extend(equal_m2);
        }
    }
    all.into_iter().map(f64::to_bits).collect()
}

proptest! {
    #[test]
    fn round_trip_is_exact_to_the_last_bit(
        numbers in proptest::collection::vec(number(), 40),
        name in "\\PC{0,20}",
        frozen in any::<bool>(),
    ) {
        let mut project = project();
        let mut numbers = numbers.into_iter().cycle();
        let mut next = || numbers.next().expect("a cycle never ends");
        project.name = name.clone();
        project.notes = format!("{name}\n\"\\\t");
        let design = &mut project.design;
        design.fluid.density_kg_m3 = next();
        design.fluid.viscosity_pa_s = next();
        design.duct[1].to_m = vec2(next(), next());
        design.duct[2].shape = PieceShape::Spline { through_m: vec![vec2(next(), next()); 3] };
        for p in &mut design.inserts[0].points_m {
            *p = vec2(next(), next());
        }
        design.inserts[0].frozen = frozen;
        design.limits = vec![Limit::Area {
            insert: Some(name.clone()),
            equal_m2: Some(next()),
            at_least_m2: None,
            at_most_m2: None,
        }];
        let insert = Insert {
            name: name.clone(),
            points_m: vec![vec2(next(), next())],
            frozen,
            thermal: ThermalCondition::FixedFlux { flux_w_m2: next() },
        };
        project.variants = vec![Variant { name, inserts: vec![insert] }];
        let text = project.to_json().expect("storable");
        let back = Project::from_json(&text).expect("readable");
        prop_assert_eq!(&back, &project);
        prop_assert_eq!(bits(&back), bits(&project));
        prop_assert_eq!(back.to_json().expect("storable"), text);
    }

    #[test]
    fn any_text_gives_an_answer(text in "\\PC{0,300}") {
        let _ = Project::from_json(&text);
    }

    #[test]
    fn any_damage_to_a_file_gives_an_answer(at in any::<prop::sample::Index>(), new in any::<char>()) {
        let mut characters: Vec<char> = text().chars().collect();
        let at = at.index(characters.len());
        characters[at] = new;
        let damaged: String = characters.into_iter().collect();
        if let Err(error) = Project::from_json(&damaged) {
            prop_assert!(!error.to_string().contains('\n'));
        }
    }
}

/// Found by the damage above: a key with an escaped line break broke the one line of its refusal.
#[test]
fn a_line_break_in_a_key_stays_out_of_the_sentence() {
    let damaged = text().replacen("\"name\"", "\"\\name\"", 1);
    let error = Project::from_json(&damaged)
        .expect_err("refused")
        .to_string();
    assert!(!error.contains('\n'), "{error}");
}
