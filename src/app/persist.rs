//! Files: open, save, autosave and recovery, recent files, settings kept between sessions.

use crate::study::Project;
use serde::{Deserialize, Serialize};
use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, channel};

/// Recent files kept.
const MOST_RECENT: usize = 8;

/// Settings kept between sessions.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct Settings {
    /// Dark colours.
    pub dark: bool,
    /// Inch-based units.
    pub inch_based: bool,
    /// Factor of the lettering.
    pub text_scale: f32,
    /// Left panel open.
    pub sketch: bool,
    /// Right panel open.
    pub figures: bool,
    /// Bottom panel open.
    pub plots: bool,
    /// Recent project files, newest first.
    pub recent: Vec<PathBuf>,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            dark: false,
            inch_based: false,
            text_scale: 1.0,
            sketch: true,
            figures: true,
            plots: false,
            recent: Vec::new(),
        }
    }
}

impl Settings {
    /// From the user's configuration folder; defaults where there is nothing readable.
    pub fn load() -> Self {
        settings_path()
            .and_then(|p| std::fs::read_to_string(p).ok())
            .and_then(|text| serde_json::from_str(&text).ok())
            .unwrap_or_default()
    }

    /// Write them; a failure loses nothing but comfort.
    pub fn save(&self) {
        if let (Some(path), Ok(text)) = (settings_path(), serde_json::to_string_pretty(self)) {
            if let Some(folder) = path.parent() {
                let _ = std::fs::create_dir_all(folder);
            }
            let _ = std::fs::write(path, text);
        }
    }

    /// Put a file first among the recent ones.
    pub fn remember(&mut self, path: &Path) {
        self.recent.retain(|p| p != path);
        self.recent.insert(0, path.to_path_buf());
        self.recent.truncate(MOST_RECENT);
    }
}

fn settings_path() -> Option<PathBuf> {
    let base = std::env::var_os("XDG_CONFIG_HOME")
        .map(PathBuf::from)
        .or_else(|| std::env::var_os("HOME").map(|h| PathBuf::from(h).join(".config")))
        .or_else(|| std::env::var_os("APPDATA").map(PathBuf::from))?;
    Some(base.join("flumeloft").join("settings.json"))
}

/// Sessions kept beside one project, at most: one that is written now, and those that ended before they were saved.
const MOST_SESSIONS: usize = 9;

/// The unsaved session of one project: where it is written, and what earlier ones left.
///
/// Each session writes to a file of its own, so that an earlier one stays until the user has said what is to become of it.
#[derive(Debug)]
pub struct Session {
    own: Option<PathBuf>,
    /// Files of sessions that ended unsaved, newest first.
    pub offered: Vec<PathBuf>,
}

impl Session {
    /// Look for what earlier sessions left beside a project, or among the settings where it has no file yet.
    pub fn new(project: Option<&Path>) -> Self {
        let names: Vec<PathBuf> = (1..=MOST_SESSIONS)
            .filter_map(|k| session_path(project, k))
            .collect();
        let mut offered: Vec<PathBuf> = names.iter().filter(|p| p.exists()).cloned().collect();
        let written = |p: &PathBuf| std::fs::metadata(p).and_then(|m| m.modified()).ok();
        offered.sort_by_key(|p| std::cmp::Reverse(written(p)));
        // Where all names are taken the oldest gives way.
        let free = names.into_iter().find(|p| !p.exists());
        let own = free.or_else(|| offered.pop());
        Self { own, offered }
    }

    /// Write the session; a failure must not disturb the work, and the file before it stays whole.
    pub fn write(&self, project: &Project) {
        if let (Some(to), Ok(text)) = (&self.own, project.to_json()) {
            if let Some(folder) = to.parent() {
                let _ = std::fs::create_dir_all(folder);
            }
            let _ = crate::study::file::write_whole(to, text.as_bytes());
        }
    }

    /// Whether the file of this session is there.
    pub fn is_written(&self) -> bool {
        self.own.as_ref().is_some_and(|p| p.exists())
    }

    /// The session is saved: its own file goes.
    pub fn forget(&self) {
        if let Some(file) = &self.own {
            remove(file);
        }
    }
}

fn session_path(project: Option<&Path>, number: usize) -> Option<PathBuf> {
    let ending = match number {
        1 => "autosave.json".to_owned(),
        k => format!("autosave-{k}.json"),
    };
    match project {
        Some(path) => Some(path.with_extension(ending)),
        None => Some(settings_path()?.with_file_name(format!("unsaved.{ending}"))),
    }
}

/// Remove a file; one that is not there is as good as removed.
pub fn remove(file: &Path) {
    let _ = std::fs::remove_file(file);
}

/// How long ago a file was written, in words.
pub fn age_words(file: &Path) -> String {
    let age = std::fs::metadata(file)
        .and_then(|m| m.modified())
        .ok()
        .and_then(|t| t.elapsed().ok());
    let Some(minutes) = age.map(|a| a.as_secs() / 60) else {
        return "at an unknown time".into();
    };
    match minutes {
        0 => "less than a minute ago".into(),
        1 => "a minute ago".into(),
        2..=119 => format!("{minutes} minutes ago"),
        120..=2879 => format!("{} hours ago", minutes / 60),
        _ => format!("{} days ago", minutes / 1440),
    }
}

/// What a path is asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Purpose {
    /// Open a project.
    Open,
    /// Save the project.
    SaveAs,
    /// Write a contour.
    Contour,
    /// Write a picture.
    Picture,
    /// Write the history.
    History,
    /// Write a picture of the window.
    Window,
    /// Read a contour.
    Import,
}

impl Purpose {
    /// Title of the question.
    pub fn title(self) -> &'static str {
        match self {
            Self::Open => "Open a project",
            Self::SaveAs => "Save the project as",
            Self::Contour => "Write the contour to",
            Self::Picture => "Write the picture to",
            Self::History => "Write the history to",
            Self::Window => "Write the picture of the window to",
            Self::Import => "Read a contour from",
        }
    }

    /// Whether the file is read, not written.
    pub fn reads(self) -> bool {
        matches!(self, Self::Open | Self::Import)
    }
}

/// A question for a path: a field in the window that always works, and the system's own dialogue beside it.
pub struct PathQuestion {
    /// What for.
    pub purpose: Purpose,
    /// Path as typed.
    pub text: String,
    /// A file of this name is there: the question is now whether to replace it.
    pub replaces: bool,
    answer: Option<Receiver<Option<PathBuf>>>,
}

impl PathQuestion {
    /// Ask with a proposal.
    pub fn new(purpose: Purpose, proposal: &Path) -> Self {
        Self {
            purpose,
            text: proposal.to_string_lossy().into_owned(),
            replaces: false,
            answer: None,
        }
    }

    /// Open the system's dialogue on a thread of its own: where there is none it answers nothing.
    pub fn browse(&mut self, wake: impl Fn() + Send + 'static) {
        let (send, receive) = channel();
        let (reads, proposal) = (self.purpose.reads(), PathBuf::from(&self.text));
        std::thread::spawn(move || {
            let mut dialogue = rfd::FileDialog::new();
            if let Some(folder) = proposal.parent() {
                dialogue = dialogue.set_directory(folder);
            }
            if let Some(name) = proposal.file_name() {
                dialogue = dialogue.set_file_name(name.to_string_lossy());
            }
            let path = if reads {
                dialogue.pick_file()
            } else {
                dialogue.save_file()
            };
            let _ = send.send(path);
            wake();
        });
        self.answer = Some(receive);
    }

    /// Take in the dialogue's answer, if it came.
    pub fn poll(&mut self) {
        if let Some(receive) = &self.answer
            && let Ok(answer) = receive.try_recv()
        {
            if let Some(path) = answer {
                self.text = path.to_string_lossy().into_owned();
            }
            self.answer = None;
        }
    }
}
