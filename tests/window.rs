//! The real window under a virtual display: first frame, a drag by the mouse, Improve, export, picture.
//!
//! Skipped, and said so, where Xvfb, xdotool or ImageMagick's import are missing.

use std::cell::RefCell;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant};

/// Ends a process whatever happens.
struct Ended(Child);

impl Drop for Ended {
    fn drop(&mut self) {
        let _ = self.0.kill();
        let _ = self.0.wait();
    }
}

fn has(program: &str) -> bool {
    Command::new("sh")
        .args(["-c", &format!("command -v {program}")])
        .stdout(Stdio::null())
        .status()
        .is_ok_and(|s| s.success())
}

/// A window with its log.
struct Window {
    display: String,
    log: Receiver<String>,
    /// Screen place of the first control point, as logged last.
    handle: RefCell<String>,
    _program: Ended,
    _screen: Ended,
}

impl Window {
    fn open(folder: &Path, file: &Path) -> Self {
        let number = 90 + std::process::id() % 400;
        let display = format!(":{number}");
        let screen = Command::new("Xvfb")
            .args([&display, "-screen", "0", "1440x900x24"])
            .stdout(Stdio::null())
            .stderr(Stdio::null())
            .spawn()
            .unwrap();
        let screen = Ended(screen);
        let socket = format!("/tmp/.X11-unix/X{number}");
        wait_until("the display", || Path::new(&socket).exists());
        let mut program = Command::new(env!("CARGO_BIN_EXE_flumeloft"))
            .args(["studio", file.to_str().unwrap()])
            .env("DISPLAY", &display)
            .env_remove("WAYLAND_DISPLAY")
            .env("LIBGL_ALWAYS_SOFTWARE", "1")
            .env("FLUMELOFT_LOG", "1")
            .env("XDG_CONFIG_HOME", folder)
            .stdout(Stdio::null())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        let stderr = program.stderr.take().unwrap();
        let (send, log) = channel();
        std::thread::spawn(move || {
            for line in BufReader::new(stderr).lines().map_while(Result::ok) {
                let _ = send.send(line);
            }
        });
        Self {
            display,
            log,
            handle: RefCell::default(),
            _program: Ended(program),
            _screen: screen,
        }
    }

    /// The next log line that starts with a word; the rest of it.
    fn wait_for(&self, word: &str) -> String {
        let wanted = format!("log: {word}");
        let since = Instant::now();
        let mut seen = Vec::new();
        while since.elapsed() < Duration::from_secs(180) {
            if let Ok(line) = self.log.recv_timeout(Duration::from_secs(1)) {
                if let Some(rest) = line.strip_prefix(&wanted) {
                    return rest.trim().to_owned();
                }
                if let Some(place) = line.strip_prefix("log: handle ") {
                    self.handle.replace(place.to_owned());
                }
                seen.push(line);
            }
        }
        panic!("no line \"{wanted}\" came; seen: {seen:?}");
    }

    /// Take in what was logged so far.
    fn drain(&self) {
        while let Ok(line) = self.log.try_recv() {
            if let Some(place) = line.strip_prefix("log: handle ") {
                self.handle.replace(place.to_owned());
            }
        }
    }

    fn mouse(&self, arguments: &[&str]) -> String {
        let out = Command::new("xdotool")
            .args(arguments)
            .env("DISPLAY", &self.display)
            .output()
            .unwrap();
        // A hand is slower than a frame.
        std::thread::sleep(Duration::from_millis(90));
        String::from_utf8_lossy(&out.stdout).trim().to_owned()
    }

    fn focus(&self) {
        wait_until("the window's name", || {
            !self.mouse(&["search", "--name", "Flumeloft"]).is_empty()
        });
        let window = self
            .mouse(&["search", "--name", "Flumeloft"])
            .lines()
            .next()
            .unwrap()
            .to_owned();
        self.mouse(&["windowfocus", "--sync", &window]);
    }

    fn picture(&self, path: &Path) -> image::RgbImage {
        let status = Command::new("import")
            .args(["-window", "root", path.to_str().unwrap()])
            .env("DISPLAY", &self.display)
            .status()
            .unwrap();
        assert!(status.success());
        image::open(path).unwrap().to_rgb8()
    }
}

fn wait_until(what: &str, mut done: impl FnMut() -> bool) {
    let since = Instant::now();
    while !done() {
        assert!(
            since.elapsed() < Duration::from_secs(60),
            "{what} did not come"
        );
        std::thread::sleep(Duration::from_millis(50));
    }
}

/// A number behind `key=` in a log line.
fn number(line: &str, key: &str) -> f64 {
    let rest = line.split(&format!("{key}=")).nth(1).unwrap();
    rest.split_whitespace().next().unwrap().parse().unwrap()
}

/// Mean colours of a coarse raster, row by row.
fn coarse(picture: &image::RgbImage) -> image::RgbImage {
    image::imageops::resize(picture, 48, 30, image::imageops::FilterType::Triangle)
}

#[test]
fn a_designer_drags_improves_and_exports() {
    if !["Xvfb", "xdotool", "import"].iter().all(|p| has(p)) {
        println!("skipped: Xvfb, xdotool or import is missing");
        return;
    }
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("study.json");
    let sample = include_str!("../sample_projects/air_tube.json");
    let mut json: serde_json::Value = serde_json::from_str(sample).unwrap();
    json["run"]["accuracy"] = "draft".into();
    json["run"]["steps"] = 4.into();
    std::fs::write(&file, json.to_string()).unwrap();

    let window = Window::open(folder.path(), &file);
    let first = window.wait_for("solved");
    window.focus();
    let before = window.picture(&folder.path().join("before.png"));

    // Drag the first control point downstream, once the panels stand still.
    std::thread::sleep(Duration::from_secs(1));
    window.drain();
    let handle = window.handle.borrow().clone();
    let [x, y] = handle.split_whitespace().collect::<Vec<_>>()[..] else {
        panic!("{handle}")
    };
    window.mouse(&["mousemove", "--sync", x, y]);
    window.mouse(&["mousedown", "1"]);
    for _ in 0..5 {
        window.mouse(&["mousemove_relative", "--sync", "--", "2", "0"]);
    }
    window.mouse(&["mouseup", "1"]);
    let second = window.wait_for("solved");
    assert_ne!(number(&first, "heat"), number(&second, "heat"));
    assert_ne!(number(&first, "drop"), number(&second, "drop"));

    // Take it back, improve.
    window.mouse(&["key", "ctrl+z"]);
    window.wait_for("solved");
    window.mouse(&["key", "F5"]);
    let finished = window.wait_for("finished");
    assert!(number(&finished, "change") > 5.0, "{finished}");

    // Export the contour by keyboard.
    let list = folder.path().join("contour.txt");
    window.mouse(&["key", "ctrl+e"]);
    std::thread::sleep(Duration::from_millis(700));
    window.mouse(&["key", "ctrl+a"]);
    window.mouse(&["type", "--delay", "15", list.to_str().unwrap()]);
    window.mouse(&["key", "Return"]);
    window.wait_for("exported");
    let text = std::fs::read_to_string(&list).unwrap();
    let read = flumeloft::geometry::coordinate_list::CoordinateList::read(&text).unwrap();
    assert!(read.points_m.len() > 30, "{text}");

    // The pictures: the same layout, another shape and field in the middle.
    std::thread::sleep(Duration::from_millis(700));
    let after = window.picture(&folder.path().join("after.png"));
    let (a, b) = (coarse(&before), coarse(&after));
    let moved = |x: u32, y: u32| {
        let (p, q) = (a.get_pixel(x, y), b.get_pixel(x, y));
        (0..3)
            .map(|c| i32::from(p[c]).abs_diff(i32::from(q[c])))
            .max()
            .unwrap_or(0)
            > 12
    };
    let changed = |xs: std::ops::Range<u32>, ys: std::ops::Range<u32>| {
        ys.flat_map(|y| xs.clone().map(move |x| (x, y)))
            .filter(|&(x, y)| moved(x, y))
            .count()
    };
    assert!(changed(9..35, 11..18) >= 3, "the field did not change");
    assert!(changed(0..8, 0..16) <= 20, "the sketch panel moved");
    let warm = b
        .pixels()
        .filter(|p| p[0] > 150 && p[0] > p[2] + 30)
        .count();
    let dark = b.pixels().filter(|p| p[2] > p[0] + 25 && p[0] < 70).count();
    assert!(
        warm >= 2 && dark >= 2,
        "no hot and cold colours in the picture: {warm} {dark}"
    );
}
