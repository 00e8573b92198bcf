//! An audit as text.

use std::fmt;

use super::Audit;
use super::problem::Short;

/// Problems that are written out; more would push the first ones off the screen.
const SHOWN: usize = 20;

impl fmt::Display for Audit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        writeln!(f, "facets           {}", self.facets)?;
        writeln!(f, "volume V         {} m³", Short(self.volume))?;
        writeln!(f, "wall area S      {} m²", Short(self.area))?;
        writeln!(f, "mean chord 4V/S  {} m", Short(self.mean_chord))?;
        let count = self.problems.len() + self.more;
        if count == 0 {
            return write!(f, "problems         none");
        }
        write!(f, "problems         {count}")?;
        for problem in self.problems.iter().take(SHOWN) {
            write!(f, "\n  {problem}")?;
        }
        if count > SHOWN {
            write!(f, "\n  and {} more", count - SHOWN)
        } else {
            Ok(())
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::geometry::audit::fixtures::{unit_cube, without};

    #[test]
    fn sound_mesh_is_a_short_table() {
        assert_eq!(
            unit_cube().audit().to_string(),
            "facets           6\nvolume V         1 m³\nwall area S      6 m²\nmean chord 4V/S  0.666667 m\n\
             problems         none"
        );
    }

    #[test]
    fn each_problem_has_a_line() {
        let text = without(&unit_cube(), 5).audit().to_string();
        let lines: Vec<_> = text.lines().collect();
        assert_eq!(lines[4], "problems         4");
        assert_eq!(lines.len(), 9);
        assert!(lines[5].starts_with(
            "  the edge of facet 0 from (-0.5, -0.5, 0.5) m to (-0.5, 0.5, 0.5) m belongs"
        ));
    }
}
