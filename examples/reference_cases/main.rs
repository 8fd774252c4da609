//! Runs every reference case file of a folder and sets the figures beside the reference values.
//!
//! `cargo run --release --example reference_cases -- FOLDER [--accuracy draft|design|final] [--order K] [--json PATH]`

mod case;
mod shear;
mod table;

use case::ReferenceCase;
use flumeloft::mesh::Fineness;
use std::process::ExitCode;
use table::Row;

fn main() -> ExitCode {
    match run() {
        Ok(()) => ExitCode::SUCCESS,
        Err(sentence) => {
            eprintln!("{sentence}");
            ExitCode::from(2)
        }
    }
}

fn run() -> Result<(), String> {
    let mut arguments = std::env::args().skip(1);
    let (mut folder, mut json, mut fineness, mut order) = (None, None, Fineness::Design, 4);
    while let Some(argument) = arguments.next() {
        let mut next = |what: &str| arguments.next().ok_or(format!("{what} needs a value"));
        match argument.as_str() {
            "--json" => json = Some(next("--json")?),
            "--order" => {
                order = next("--order")?
                    .parse()
                    .map_err(|_| "--order takes 2 to 5".to_string())?
            }
            "--accuracy" => {
                fineness = match next("--accuracy")?.as_str() {
                    "draft" => Fineness::Draft,
                    "design" => Fineness::Design,
                    "final" => Fineness::Final,
                    other => {
                        return Err(format!("--accuracy is draft, design or final, not {other}"));
                    }
                }
            }
            _ if folder.is_none() && !argument.starts_with('-') => folder = Some(argument),
            other => return Err(format!("unknown argument {other}")),
        }
    }
    let folder = folder.ok_or("name the folder of the case files")?;
    let mut files: Vec<_> = std::fs::read_dir(&folder)
        .map_err(|e| format!("cannot read {folder}: {e}"))?
        .filter_map(|entry| Some(entry.ok()?.path()))
        .filter(|path| path.extension().is_some_and(|e| e == "json"))
        .collect();
    files.sort();
    let mut all: Vec<Row> = Vec::new();
    for path in files {
        let name = path
            .file_stem()
            .map_or(String::new(), |s| s.to_string_lossy().into_owned());
        let source =
            std::fs::read_to_string(&path).map_err(|e| format!("cannot read {name}: {e}"))?;
        let result = ReferenceCase::parse(&source)
            .map_err(|e| e.0)
            .and_then(|c| table::rows(&c, fineness, order));
        match result {
            Ok((rows, triangles, unknowns)) => {
                println!(
                    "\n{name}: {triangles} triangles, {unknowns} unknowns, {:.2} s",
                    rows[0].seconds
                );
                rows.iter().for_each(print);
                all.extend(rows);
            }
            Err(why) => {
                println!("\n{name}: not supported: {why}");
                all.push(Row {
                    case: name,
                    figure: "case".into(),
                    reference: None,
                    uncertainty: None,
                    value: None,
                    relative_error: None,
                    seconds: 0.0,
                    supported: format!("not supported: {why}"),
                });
            }
        }
    }
    if let Some(path) = json {
        let text = serde_json::to_string_pretty(&all).map_err(|e| e.to_string())?;
        std::fs::write(&path, text).map_err(|e| format!("cannot write {path}: {e}"))?;
    }
    Ok(())
}

fn print(row: &Row) {
    let number = |x: Option<f64>| x.map_or("-".into(), |x| format!("{x:.8e}"));
    let error = row
        .relative_error
        .map_or("-".into(), |e| format!("{:+.2e}", e));
    println!(
        "  {:<34} {:>16} {:>16} {:>10}  {}",
        row.figure,
        number(row.reference),
        number(row.value),
        error,
        if row.supported == "supported" {
            ""
        } else {
            &row.supported
        }
    );
}
