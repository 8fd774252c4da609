//! The program: a window or headless verbs.

fn main() {
    let file = std::env::args().nth(1).map(std::path::PathBuf::from);
    if let Err(e) = flumeloft::app::run(file) {
        eprintln!("{e}");
        std::process::exit(2);
    }
}
