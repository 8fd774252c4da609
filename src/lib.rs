//! Flumeloft: a studio for cooled channels with heated inserts.
//!
//! Data flows one way through twelve layers; `tests/architecture.rs` keeps the arrows. From the
//! bottom: [`base`], [`geometry`], [`linalg`], [`mesh`], [`optimise`], [`fem`], [`physics`],
//! [`sensitivity`], [`study`], [`report`], [`cli`], [`app`]. All quantities inside are SI and kelvin,
//! two-dimensional and per metre of depth.

pub mod app;
pub mod base;
pub mod cli;
pub mod fem;
pub mod geometry;
pub mod linalg;
pub mod mesh;
pub mod optimise;
pub mod physics;
pub mod report;
pub mod sensitivity;
pub mod study;
