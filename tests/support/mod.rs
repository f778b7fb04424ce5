//! What several tests of the core share: published curves, random rays, rules and finders by name, and data files.
#![allow(dead_code)] // each test uses its own part

pub(crate) mod cast;
pub(crate) mod curves;
pub(crate) mod rays;
pub(crate) mod table;
