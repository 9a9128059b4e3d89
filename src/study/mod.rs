//! The whole job from one file.
//!
//! A study file ([`StudyFile`]) says which networks, which questions and which means;
//! [`run`](run::run) answers every question once and keeps each answer as soon as it is
//! there; [`write_results`] lays out a folder of tables and one self-contained page.
//!
//! | question | module |
//! |---|---|
//! | Which keys does a study file have? | [`mod@file`] |
//! | Which networks does it mean? | [`case`] |
//! | Which regions? | [`regions`] |
//! | Which other questions? | [`questions`] |
//! | What is an answer? | [`answer`], [`row`] |
//! | What would it cost? | [`check`] |
//! | Which files come out? | [`result`], [`csv`], [`arrays`], [`figures`], [`report`], [`provenance`] |
//! | How does a study file begin? | [`template`] |

pub mod answer;
pub mod arrays;
pub mod ask;
pub mod case;
pub mod check;
pub mod csv;
mod error;
pub mod figures;
pub mod file;
pub mod fit;
mod folder;
mod journal;
pub mod keys;
mod layout;
pub mod picture;
pub mod provenance;
pub mod questions;
pub mod regions;
pub mod report;
pub mod result;
pub mod row;
pub mod run;
pub mod template;
mod write;

pub use case::{Case, Setting};
pub use error::StudyError;
pub use file::StudyFile;
pub use folder::Folder;
pub use provenance::Provenance;
pub use result::StudyResult;
pub use run::{Limits, Outcome};
pub use write::{write_results, write_tables};
