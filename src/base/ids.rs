//! Names that the plant file gives to things. Each is a type of its own, so that a tag is
//! never passed where a train is meant.

use std::fmt;
use std::sync::Arc;

use serde::{Deserialize, Serialize};

/// A train: what an operator takes out of service as one.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct TrainId(Arc<str>);

/// A tag: the name of one signal in one source.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct Tag(Arc<str>);

/// A source: one export layout of the plant's historian.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct SourceId(Arc<str>);

impl TrainId {
    /// Takes the name as it stands in the plant file.
    pub fn new(name: &str) -> Self {
        Self(Arc::from(name))
    }
    /// The name.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl Tag {
    /// Takes the name as it stands in the plant file.
    pub fn new(name: &str) -> Self {
        Self(Arc::from(name))
    }
    /// The name.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl SourceId {
    /// Takes the name as it stands in the plant file.
    pub fn new(name: &str) -> Self {
        Self(Arc::from(name))
    }
    /// The name.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl fmt::Display for TrainId {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

impl fmt::Display for Tag {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

impl fmt::Display for SourceId {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}
