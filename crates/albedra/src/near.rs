//! Names that somebody may have meant.

use std::fmt;

/// The names nearest to a wrong one, or all where there are few.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Near(Vec<String>);

/// So many names are listed at most.
const MOST: usize = 8;

impl Near {
    /// Ranks the names by their likeness to the wrong one.
    pub fn to<'a>(wrong: &str, names: impl Iterator<Item = &'a str>) -> Self {
        let mut ranked: Vec<(usize, &str)> =
            names.map(|name| (distance(wrong, name), name)).collect();
        ranked.sort_by_key(|&(distance, _)| distance);
        Self(
            ranked
                .into_iter()
                .take(MOST)
                .map(|(_, name)| name.to_owned())
                .collect(),
        )
    }

    /// The names, the likeliest first.
    pub fn names(&self) -> &[String] {
        &self.0
    }
}

fn distance(a: &str, b: &str) -> usize {
    strsim::damerau_levenshtein(&a.to_lowercase(), &b.to_lowercase())
}

impl fmt::Display for Near {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (k, name) in self.0.iter().enumerate() {
            let before = if k == 0 { "; there are: " } else { ", " };
            write!(f, "{before}\"{name}\"")?;
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn likeliest_name_comes_first() {
        let near = Near::to("detecter", ["z-", "x+", "detector", "sample"].into_iter());
        assert_eq!(near.names()[0], "detector");
        assert!(near.to_string().starts_with("; there are: \"detector\", "));
    }
}
