//! Names of regions and of sides.

use crate::MeshError;

/// An ordered list of distinct names; the position of a name is its number.
///
/// ```
/// use hypercircle_mesh::Names;
/// let mut names = Names::default();
/// let brick = names.add("brick");
/// assert_eq!(names.add("brick"), brick);
/// assert_eq!(names.get(brick), Some("brick"));
/// assert_eq!(names.find("foam"), None);
/// ```
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Names {
    list: Vec<String>,
}

impl Names {
    /// The number of a name, which is added if it is new.
    pub fn add(&mut self, name: &str) -> u32 {
        self.find(name).unwrap_or_else(|| {
            self.list.push(name.to_owned());
            self.list.len() as u32 - 1
        })
    }

    /// The number of a name, if it is there.
    #[must_use]
    pub fn find(&self, name: &str) -> Option<u32> {
        self.list.iter().position(|n| n == name).map(|i| i as u32)
    }

    /// The name with a number.
    #[must_use]
    pub fn get(&self, number: u32) -> Option<&str> {
        self.list.get(number as usize).map(String::as_str)
    }

    /// How many names there are.
    #[must_use]
    pub fn len(&self) -> usize {
        self.list.len()
    }

    /// Whether there are none.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// The names in order of their numbers.
    pub fn iter(&self) -> impl Iterator<Item = &str> {
        self.list.iter().map(String::as_str)
    }

    /// Like [`Names::find`], with an error that lists the names there are.
    pub(crate) fn require(&self, what: &'static str, name: &str) -> Result<u32, MeshError> {
        self.find(name).ok_or_else(|| MeshError::UnknownName { what, name: name.to_owned(), known: self.list.clone() })
    }
}
