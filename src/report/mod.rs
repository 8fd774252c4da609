//! What leaves the program: contour lists, tables, pictures. All in SI or with the unit in the name.

pub mod colour;
pub mod contour_file;
pub mod error;
pub mod field;
pub mod figure;
mod lettering;
mod painter;
pub mod table;
pub mod ticks;

pub use contour_file::file_name as contour_file_name;
pub use error::ReportError;
pub use field::Field;
pub use figure::Figure;
