//! Files of the studio: open, save, the unsaved session beside the project, and the questions these ask.

use super::history::History;
use super::log;
use super::persist::{self, PathQuestion, Purpose, Session};
use super::studio::Studio;
use super::words::Selection;
use crate::study::Project;
use std::path::{Path, PathBuf};

impl Studio {
    /// Write the session if it changed since the last time.
    pub fn autosave(&mut self) {
        if self.is_dirty() && self.autosaved.as_ref() != Some(&self.project) {
            self.session.write(&self.project);
            self.autosaved = Some(self.project.clone());
        }
    }

    /// Ask for a path.
    pub(super) fn ask(&mut self, purpose: Purpose, name: &str) {
        let folder = self
            .path
            .as_deref()
            .and_then(Path::parent)
            .map_or_else(PathBuf::new, Path::to_path_buf);
        let proposal = match (purpose, &self.path) {
            (Purpose::SaveAs, Some(path)) => path.clone(),
            _ => folder.join(name),
        };
        self.question = Some(PathQuestion::new(purpose, &proposal));
    }

    /// A path was proposed: asks before another file of that name is replaced.
    pub fn propose(&mut self, purpose: Purpose, path: &Path) {
        let own = purpose == Purpose::SaveAs && self.path.as_deref() == Some(path);
        if !purpose.reads() && !own && path.exists() {
            let mut question = PathQuestion::new(purpose, path);
            question.replaces = true;
            self.question = Some(question);
        } else {
            self.answered(purpose, path);
        }
    }

    /// Whether a question for a path waits, and whether it is the one about replacing a file.
    pub fn asks(&self) -> Option<bool> {
        self.question.as_ref().map(|q| q.replaces)
    }

    /// A path was given, and what is there may be replaced.
    pub fn answered(&mut self, purpose: Purpose, path: &Path) {
        match self.file(purpose, path) {
            Ok(text) => {
                let word = if purpose.reads() { "read" } else { "exported" };
                log(&format!("{word} {}", path.display()));
                self.message = Some((text, false));
                self.question = None;
            }
            Err(sentence) => {
                log(&format!("failed {sentence}"));
                self.message = Some((sentence, true));
                if let Some(question) = &mut self.question {
                    question.replaces = false;
                }
            }
        }
    }

    fn file(&mut self, purpose: Purpose, path: &Path) -> Result<String, String> {
        match purpose {
            Purpose::Open => {
                if self.link.is_improving() {
                    return Err(BUSY.into());
                }
                let project = Project::load(path).map_err(|e| e.to_string())?;
                let was_dirty = self.is_dirty();
                self.open(project, Some(path.to_path_buf()));
                let kept = if was_dirty {
                    " What was not saved before is kept and offered when that project is opened again."
                } else {
                    ""
                };
                Ok(format!("Opened {}.{kept}", path.display()))
            }
            Purpose::SaveAs => {
                self.project.save(path).map_err(|e| e.to_string())?;
                self.session.forget();
                if self.path.as_deref() != Some(path) {
                    self.path = Some(path.to_path_buf());
                    self.session = Session::new(self.path.as_deref());
                }
                self.saved = self.project.clone();
                self.settings.remember(path);
                self.settings.save();
                Ok(format!("Saved {}.", path.display()))
            }
            Purpose::Contour => super::export::contour(self, path),
            Purpose::Picture => super::export::picture(self, path),
            Purpose::History => super::export::history(self, path),
            Purpose::Import => super::export::import(self, path),
            Purpose::Window => {
                self.snap = Some((path.to_path_buf(), 2));
                Ok("The picture of the window is being written.".into())
            }
        }
    }

    /// A file was dropped on the window: a project, or a list of coordinates.
    pub(super) fn dropped(&mut self, path: &Path) {
        let is_project =
            std::fs::read_to_string(path).is_ok_and(|t| t.trim_start().starts_with('{'));
        let is_named_so = path
            .extension()
            .is_some_and(|e| e.eq_ignore_ascii_case("json"));
        if is_project || is_named_so {
            self.answered(Purpose::Open, path);
        } else {
            self.answered(Purpose::Import, path);
        }
    }

    /// Replace everything by another project; refused while an improvement runs.
    pub fn open(&mut self, project: Project, path: Option<PathBuf>) {
        if self.link.is_improving() {
            self.message = Some((BUSY.into(), true));
            return;
        }
        if let Some(path) = &path {
            self.settings.remember(path);
            self.settings.save();
        }
        self.autosave();
        self.autosaved = None;
        self.unsaved_since = None;
        self.selection = if project.design.inserts.is_empty() {
            Selection::Nothing
        } else {
            Selection::Insert(0)
        };
        self.saved = project.clone();
        self.project = project;
        self.session = Session::new(path.as_deref());
        self.path = path;
        self.history = History::default();
        self.link.forget();
        self.kept.clear();
        self.unsolvable.clear();
        self.compared = None;
        self.looked_at = None;
        self.canvas.fit_asked = true;
    }

    /// Sessions that ended unsaved, newest first: what the offer in the window names.
    pub fn offered_sessions(&self) -> &[PathBuf] {
        &self.session.offered
    }

    /// Take up a session that ended unsaved. It is written again under this session's own name before its file goes.
    pub fn recover(&mut self, which: usize) {
        let Some(file) = self.session.offered.get(which).cloned() else {
            return;
        };
        match Project::load(&file) {
            Ok(project) => {
                let mut session = std::mem::replace(&mut self.session, Session::new(None));
                let (path, saved) = (self.path.clone(), self.saved.clone());
                self.open(project, path);
                self.saved = saved;
                session.offered.remove(which);
                self.session = session;
                self.autosave();
                if self.session.is_written() || !self.is_dirty() {
                    persist::remove(&file);
                }
                self.message = Some(("The unsaved session was taken up again.".into(), false));
            }
            Err(error) => self.message = Some((error.to_string(), true)),
        }
    }

    /// Delete the sessions offered.
    pub fn discard_sessions(&mut self) {
        for file in std::mem::take(&mut self.session.offered) {
            persist::remove(&file);
        }
    }

    /// Leave the sessions where they are, to be offered at the next opening.
    pub fn postpone_sessions(&mut self) {
        self.session.offered.clear();
    }
}

/// Why nothing is opened now.
const BUSY: &str = "An improvement is running: stop it before opening another project.";
