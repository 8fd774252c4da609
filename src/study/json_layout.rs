//! Layout of project files: two blanks a level, and lists of numbers on one line, so that a point is a line.

use serde_json::ser::Formatter;
use std::io::{Result, Write};

/// One open list or object.
#[derive(Default)]
struct Level {
    /// Whether something was written in it.
    filled: bool,
    /// Whether its last item was a number.
    on_one_line: bool,
}

/// The formatter.
#[derive(Default)]
pub(super) struct Layout {
    levels: Vec<Level>,
    /// A list item is due: what stands before it depends on what it is. True for the first of its list.
    due: Option<bool>,
}

impl Layout {
    fn new_line<W: ?Sized + Write>(&self, w: &mut W) -> Result<()> {
        w.write_all(b"\n")?;
        (0..self.levels.len()).try_for_each(|_| w.write_all(b"  "))
    }

    /// Write what stands before a list item.
    fn settle<W: ?Sized + Write>(&mut self, w: &mut W, number: bool) -> Result<()> {
        let Some(first) = self.due.take() else {
            return Ok(());
        };
        if let Some(level) = self.levels.last_mut() {
            level.filled = true;
            level.on_one_line = number;
        }
        if !first {
            w.write_all(if number { b", " } else { b"," })?;
        }
        if number { Ok(()) } else { self.new_line(w) }
    }

    fn open<W: ?Sized + Write>(&mut self, w: &mut W, bracket: &[u8]) -> Result<()> {
        self.settle(w, false)?;
        self.levels.push(Level::default());
        w.write_all(bracket)
    }

    fn close<W: ?Sized + Write>(&mut self, w: &mut W, bracket: &[u8]) -> Result<()> {
        self.due = None;
        let level = self.levels.pop().unwrap_or_default();
        if level.filled && !level.on_one_line {
            self.new_line(w)?;
        }
        w.write_all(bracket)
    }
}

impl Formatter for Layout {
    fn write_null<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.settle(w, true)?;
        w.write_all(b"null")
    }
    fn write_f64<W: ?Sized + Write>(&mut self, w: &mut W, value: f64) -> Result<()> {
        self.settle(w, true)?;
        serde_json::ser::CompactFormatter.write_f64(w, value)
    }
    fn begin_string<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.settle(w, false)?;
        w.write_all(b"\"")
    }
    fn begin_array<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.open(w, b"[")
    }
    fn end_array<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.close(w, b"]")
    }
    fn begin_array_value<W: ?Sized + Write>(&mut self, _: &mut W, first: bool) -> Result<()> {
        self.due = Some(first);
        Ok(())
    }
    fn begin_object<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.open(w, b"{")
    }
    fn end_object<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        self.close(w, b"}")
    }
    fn begin_object_key<W: ?Sized + Write>(&mut self, w: &mut W, first: bool) -> Result<()> {
        if let Some(level) = self.levels.last_mut() {
            level.filled = true;
        }
        if !first {
            w.write_all(b",")?;
        }
        self.new_line(w)
    }
    fn begin_object_value<W: ?Sized + Write>(&mut self, w: &mut W) -> Result<()> {
        w.write_all(b": ")
    }
}
