//! The studio: its state, what a frame does, and the dispatcher, which alone changes the design.
//! Files are in [`super::session`], steps and variants in [`super::steps`].

use super::canvas::{self, CanvasState};
use super::command::{Availability, Command};
use super::edits;
use super::history::{History, Kept};
use super::link::{Link, News};
use super::persist::{PathQuestion, Purpose, Session, Settings};
use super::words::{Edit, FieldChoice, Gesture, Mark, Selection, ViewOptions};
use super::{log, panels, theme};
use crate::base::Vec2;
use crate::geometry::{InsertMeasures, insert_measures};
use crate::study::{Case, Design, Project, SolveReport};
use panels::plots::Tab;
use std::path::PathBuf;
use std::sync::Arc;
use std::time::{Duration, Instant};

/// Time after a change until the session is written beside the project.
const AUTOSAVE_AFTER: Duration = Duration::from_secs(3);

/// Verdicts and measures of a design, taken once for each.
#[derive(Default)]
pub(super) struct Geometry {
    design: Option<Design>,
    /// Sentences without a place.
    pub faults: Vec<String>,
    /// Sentences with their place.
    pub marks: Vec<Mark>,
    /// Measures of the inserts; empty while there are faults.
    pub measures: Vec<InsertMeasures>,
}

/// Everything the window holds.
pub struct Studio {
    pub(super) project: Project,
    pub(super) saved: Project,
    pub(super) path: Option<PathBuf>,
    pub(super) selection: Selection,
    pub(super) history: History,
    pub(super) link: Link,
    pub(super) view: ViewOptions,
    pub(super) canvas: CanvasState,
    pub(super) settings: Settings,
    pub(super) geometry: Geometry,
    /// Step of the last run that is looked at.
    pub(super) looked_at: Option<usize>,
    /// Reports of kept variants, by name.
    pub(super) kept: Vec<(String, Arc<SolveReport>)>,
    /// Variants that could not be solved.
    pub(super) unsolvable: Vec<String>,
    /// Variant that figures are compared with.
    pub(super) compared: Option<String>,
    pub(super) tab: Tab,
    pub(super) question: Option<PathQuestion>,
    pub(super) finder: Option<String>,
    pub(super) keys_shown: bool,
    /// Last thing worth telling.
    pub(super) message: Option<(String, bool)>,
    /// Where the unsaved session is written, and what earlier ones left.
    pub(super) session: Session,
    pub(super) export_mm: bool,
    pub(super) chord_text: String,
    pub(super) probe: Option<String>,
    /// Path for a picture of the window, and frames to wait until the question is gone.
    pub(super) snap: Option<(PathBuf, u32)>,
    pub(super) unsaved_since: Option<Instant>,
    handle_told: Option<egui::Pos2>,
    pub(super) autosaved: Option<Project>,
    applied_theme: Option<(bool, u32)>,
}

impl Studio {
    /// A studio with a project; `wake` asks for a frame from other threads.
    pub fn new(
        project: Project,
        path: Option<PathBuf>,
        settings: Settings,
        wake: impl Fn() + Send + Sync + 'static,
    ) -> Self {
        let session = Session::new(path.as_deref());
        let selection = if project.design.inserts.is_empty() {
            Selection::Nothing
        } else {
            Selection::Insert(0)
        };
        Self {
            saved: project.clone(),
            project,
            path,
            selection,
            history: History::default(),
            link: Link::new(wake),
            view: ViewOptions::default(),
            canvas: CanvasState::default(),
            settings,
            geometry: Geometry::default(),
            looked_at: None,
            kept: Vec::new(),
            unsolvable: Vec::new(),
            compared: None,
            tab: Tab::default(),
            question: None,
            finder: None,
            keys_shown: false,
            message: None,
            session,
            export_mm: true,
            chord_text: "0.005 mm".into(),
            probe: None,
            snap: None,
            unsaved_since: None,
            handle_told: None,
            autosaved: None,
            applied_theme: None,
        }
    }

    /// The present project.
    pub fn project(&self) -> &Project {
        &self.project
    }

    /// Report of the newest solved state, and whether it belongs to an older drawing.
    pub fn figures(&self) -> Option<(&SolveReport, bool)> {
        self.link
            .solved
            .as_ref()
            .map(|s| (&s.report, self.link.is_stale(&self.case())))
    }

    /// Whether the project differs from its file.
    pub fn is_dirty(&self) -> bool {
        self.project != self.saved
    }

    /// Name of what undo takes back.
    pub fn undo_name(&self) -> Option<&str> {
        self.history.undo_name()
    }

    /// Whether an improvement runs.
    pub fn is_improving(&self) -> bool {
        self.link.is_improving()
    }

    /// Steps taken by the present or last improvement.
    pub fn steps_taken(&self) -> usize {
        self.link
            .steps
            .iter()
            .filter(|s| s.accepted)
            .count()
            .saturating_sub(1)
    }

    /// Screen place of a point of the drawing at the last frame.
    pub fn screen_from_world(&self, place_m: Vec2) -> Option<egui::Pos2> {
        self.canvas.screen_from_world(place_m)
    }

    pub(super) fn case(&self) -> Case {
        self.project.case()
    }

    pub(super) fn availability(&self) -> Availability {
        Availability {
            improving: self.link.is_improving(),
            can_undo: self.history.undo_name().is_some(),
            can_redo: self.history.redo_name().is_some(),
            has_free_insert: self.project.design.inserts.iter().any(|i| !i.frozen),
            has_insert: !self.project.design.inserts.is_empty(),
            has_faults: !self.geometry.faults.is_empty() || !self.geometry.marks.is_empty(),
            has_history: !self.link.steps.is_empty(),
        }
    }

    /// Before drawing: events of the worker, verdicts, the next solve, autosave.
    pub fn logic(&mut self, ctx: &egui::Context) {
        let look = (self.settings.dark, self.settings.text_scale.to_bits());
        if self.applied_theme != Some(look) {
            theme::apply(ctx, self.settings.dark, self.settings.text_scale);
            self.applied_theme = Some(look);
        }
        for news in self.link.drain() {
            self.take(news);
        }
        self.update_geometry();
        let sound = self.geometry.faults.is_empty() && self.geometry.marks.is_empty();
        if sound {
            let case = self.case();
            self.link.want(&case, self.history.is_open());
            self.solve_variants();
        }
        if let Some(question) = &mut self.question {
            question.poll();
        }
        super::export::snap(self, ctx);
        if self.is_dirty() && self.autosaved.as_ref() != Some(&self.project) {
            let since = *self.unsaved_since.get_or_insert_with(Instant::now);
            if since.elapsed() >= AUTOSAVE_AFTER {
                self.autosave();
                self.unsaved_since = None;
            } else {
                ctx.request_repaint_after(AUTOSAVE_AFTER);
            }
        }
        for file in ctx.input(|i| i.raw.dropped_files.clone()) {
            let path = file.path().to_path_buf();
            self.dropped(&path);
        }
    }

    fn take(&mut self, news: News) {
        match news {
            News::Nothing => {}
            News::Solved(report) => log(&format!(
                "solved heat={:.6e} drop={:.6e} flow={:.6e}",
                report.heat_w_m, report.total_pressure_drop_pa, report.flow_rate_m2_s
            )),
            News::Aside(name, Some(report)) => self.kept.push((name, report)),
            News::Aside(name, None) => self.unsolvable.push(name),
            News::Step(k) => {
                let step = &self.link.steps[k];
                log(&format!(
                    "step {} aim={:.6e} taken={}",
                    step.step, step.aim_value, step.accepted
                ));
            }
            News::Finished(improved) => self.finished(&improved),
            News::Failed(sentence) => {
                log(&format!("failed {sentence}"));
                self.message = Some((sentence, true));
            }
        }
    }

    fn update_geometry(&mut self) {
        if self.geometry.design.as_ref() == Some(&self.project.design) {
            return;
        }
        let design = self.project.design.clone();
        let (mut faults, mut marks) = (Vec::new(), Vec::new());
        let mut add = |text: String, place: Option<Vec2>| match place {
            Some(place_m) => marks.push(Mark { place_m, text }),
            None => faults.push(text),
        };
        for fault in design.faults().into_iter().chain(self.project.run.faults()) {
            add(fault.to_string(), fault.place_m);
        }
        let usable = design.inserts.iter().all(|i| i.points_m.len() >= 4) && design.duct.len() >= 2;
        let mut measures = Vec::new();
        if usable {
            let domain = design.sketch();
            if faults.is_empty() && marks.is_empty() {
                measures = (0..domain.inserts.len())
                    .map(|i| insert_measures(&domain, i))
                    .collect();
            }
        }
        self.geometry = Geometry {
            design: Some(design),
            faults,
            marks,
            measures,
        };
    }

    /// Make an edit; the only code that changes design and settings.
    pub fn edit(&mut self, gesture: &Gesture) {
        if self.link.is_improving() {
            return;
        }
        self.looked_at = None;
        let now = || Kept {
            design: self.project.design.clone(),
            run: self.project.run.clone(),
        };
        self.history.begin(&now());
        let name = edits::apply(
            &mut self.project.design,
            &mut self.project.run,
            &gesture.edit,
        );
        if gesture.finished {
            let after = Kept {
                design: self.project.design.clone(),
                run: self.project.run.clone(),
            };
            self.history.finish(name.unwrap_or_default(), &after);
        }
        self.message = None;
    }

    pub(super) fn edit_whole(&mut self, edit: Edit) {
        self.edit(&Gesture {
            edit,
            finished: true,
        });
    }

    fn restore(&mut self, kept: Option<Kept>) {
        if let Some(kept) = kept {
            self.project.design = kept.design;
            self.project.run = kept.run;
            self.selection = Selection::Nothing;
            self.looked_at = None;
        }
    }

    /// Carry out a command.
    pub fn dispatch(&mut self, ctx: &egui::Context, command: Command) {
        if command.blocked(&self.availability()).is_some() {
            return;
        }
        let now = Kept {
            design: self.project.design.clone(),
            run: self.project.run.clone(),
        };
        let toggle = |b: &mut bool| *b = !*b;
        match command {
            Command::Open => self.ask(Purpose::Open, "project.json"),
            Command::Save => match self.path.clone() {
                Some(path) => self.answered(Purpose::SaveAs, &path),
                None => self.ask(Purpose::SaveAs, "project.json"),
            },
            Command::SaveAs => self.ask(Purpose::SaveAs, "project.json"),
            Command::Undo => {
                let kept = self.history.undo(now);
                self.restore(kept);
            }
            Command::Redo => {
                let kept = self.history.redo(now);
                self.restore(kept);
            }
            Command::Improve => {
                self.message = self.project.bounding_limit_missing().map(|m| (m, true));
                self.tab = Tab::History;
                self.looked_at = None;
                self.settings.plots = true;
                let case = self.case();
                self.link.improve(&case);
                log("improving");
            }
            Command::Stop => self.link.stop(),
            Command::Pause => self.link.set_paused(!self.link.is_paused()),
            Command::KeepVariant => {
                let report = self
                    .link
                    .solved
                    .as_ref()
                    .filter(|s| s.case == self.case())
                    .map(|s| s.report.clone());
                self.keep("variant", self.project.design.inserts.clone(), report);
            }
            Command::ExportContour => self.ask(Purpose::Contour, "contour.txt"),
            Command::ExportPicture => self.ask(Purpose::Picture, "picture.png"),
            Command::ExportHistory => self.ask(Purpose::History, "history.csv"),
            Command::ImportContour => self.ask(Purpose::Import, "contour.txt"),
            Command::FitView => self.canvas.fit_asked = true,
            Command::ShowTemperature => self.view.field = FieldChoice::Temperature,
            Command::ShowSpeed => self.view.field = FieldChoice::Speed,
            Command::ShowPressure => self.view.field = FieldChoice::Pressure,
            Command::ShowTotalPressure => self.view.field = FieldChoice::TotalPressure,
            Command::ShowNothing => self.view.field = FieldChoice::Nothing,
            Command::ToggleIsoLines => toggle(&mut self.view.iso_lines),
            Command::ToggleStreamlines => toggle(&mut self.view.streamlines),
            Command::ToggleMesh => toggle(&mut self.view.mesh),
            Command::ToggleDimensions => toggle(&mut self.view.dimensions),
            Command::ToggleSnap => toggle(&mut self.view.snap),
            Command::ToggleSketch => toggle(&mut self.settings.sketch),
            Command::ToggleFigures => toggle(&mut self.settings.figures),
            Command::TogglePlots => toggle(&mut self.settings.plots),
            Command::ToggleDark => toggle(&mut self.settings.dark),
            Command::ToggleUnits => toggle(&mut self.settings.inch_based),
            Command::LargerText => {
                self.settings.text_scale = (self.settings.text_scale + 0.1).min(1.8)
            }
            Command::SmallerText => {
                self.settings.text_scale = (self.settings.text_scale - 0.1).max(0.8)
            }
            Command::FindCommand => self.finder = Some(String::new()),
            Command::SnapWindow => self.ask(Purpose::Window, "window.png"),
            Command::ShowKeys => toggle(&mut self.keys_shown),
        }
        if matches!(
            command,
            Command::ShowTemperature
                | Command::ShowSpeed
                | Command::ShowPressure
                | Command::ShowTotalPressure
        ) {
            self.view.fixed_range = None;
        }
        self.settings.save();
        ctx.request_repaint();
    }

    pub(super) fn refit(&mut self) {
        self.canvas.fit_asked = true;
    }

    /// Draw a frame.
    pub fn ui(&mut self, ui: &mut egui::Ui) {
        super::frame::draw(self, ui);
    }

    /// Log the place of the first handle whenever it moved on the screen (for the test of the real window).
    fn tell_handle(&mut self, scale: f32) {
        let first = self
            .project
            .design
            .inserts
            .first()
            .and_then(|i| i.points_m.first());
        let Some(at) = first.and_then(|p| self.canvas.screen_from_world(*p)) else {
            return;
        };
        let told = (at * scale).round();
        if self.handle_told != Some(told) {
            log(&format!("handle {:.0} {:.0}", told.x, told.y));
            self.handle_told = Some(told);
        }
    }

    pub(super) fn canvas_frame(&mut self, ui: &mut egui::Ui) {
        let improving = self.link.is_improving();
        let watched = if improving {
            self.link.steps.iter().rposition(|s| s.accepted)
        } else {
            self.looked_at
        };
        let record = watched.and_then(|k| self.link.steps.get(k));
        let shown = watched.and_then(|k| self.design_at(k));
        let last =
            watched.or_else(|| (!self.link.steps.is_empty()).then_some(self.link.steps.len()));
        let ghosts = last.map_or(Vec::new(), |last| self.ghosts(last));
        let show_ghosts = improving
            || self.looked_at.is_some()
            || self
                .link
                .improved
                .as_ref()
                .is_some_and(|i| i.best.case == self.case());
        let case = self.case();
        let record_shot = record.and_then(|r| r.snapshot.clone());
        let snapshot =
            record_shot.or_else(|| self.link.solved.as_ref().map(|s| s.snapshot.clone()));
        let mut marks = self.geometry.marks.clone();
        if marks.is_empty()
            && let Some((report, false)) = self.figures()
        {
            let placed = report
                .cautions
                .iter()
                .filter(|c| c.level >= crate::study::CautionLevel::Warning);
            marks.extend(placed.filter_map(|c| {
                Some(Mark {
                    place_m: c.place_m?,
                    text: c.text.clone(),
                })
            }));
            marks.truncate(1);
        }
        let input = super::words::CanvasInput {
            design: shown.as_ref().unwrap_or(&self.project.design),
            measures: if shown.is_some() {
                &[]
            } else {
                &self.geometry.measures
            },
            selection: &self.selection,
            snapshot: snapshot.as_ref(),
            stale: record.is_none() && self.link.is_stale(&case),
            editable: !improving && self.looked_at.is_none(),
            ghosts_m: if show_ghosts { &ghosts } else { &[] },
            marks: &marks,
            options: &self.view,
            inch_based: self.settings.inch_based,
            dark: self.settings.dark,
        };
        let output = canvas::show(ui, &mut self.canvas, &input);
        self.tell_handle(ui.ctx().pixels_per_point());
        for gesture in &output.gestures {
            self.edit(gesture);
        }
        if let Some(selection) = output.selection {
            self.selection = selection;
        }
        self.probe = output.probe;
    }
}
