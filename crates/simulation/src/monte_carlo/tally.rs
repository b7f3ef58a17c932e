//! Counting where simulated sums fall: a fixed grid in z, exact counts at chosen places, nothing else kept.

/// Number of cells of the grid: at ±8 a cell holds at most 1e-4 of a normal law.
const GRID_CELLS: usize = 1 << 16;

/// Where the cells lie.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Cells {
    /// Equal half-open stretches [edge, next edge).
    Grid {
        /// Lower edge of the first cell.
        from: f64,
        /// Length of a cell.
        width: f64,
    },
    /// One cell per point first + i·span of a lattice.
    Lattice {
        /// The first point of the window.
        first: f64,
        /// Distance of neighbouring points.
        span: f64,
    },
}

/// The plan of a tally: cells, and places where P(Z < z) and P(Z ≤ z) are counted exactly.
#[derive(Debug, Clone)]
pub(crate) struct Layout {
    /// The cells.
    pub cells: Cells,
    /// How many there are.
    pub length: usize,
    /// Places, ascending (unused on a lattice, where every point is one).
    pub places: Vec<f64>,
    /// |Z − place| up to this is taken as Z = place: rounding of simulated sums.
    pub tolerance: f64,
    /// For each place the first and the last cell that its tolerance touches.
    spans: Vec<(usize, usize)>,
    /// Per cell: whether some place touches it.
    touched: Vec<bool>,
}

impl Layout {
    /// A grid over ±`reach` with exact counts at `places`.
    pub(crate) fn grid(reach: f64, mut places: Vec<f64>, tolerance: f64) -> Self {
        let width = 2.0 * reach / GRID_CELLS as f64;
        let cells = Cells::Grid { from: -reach, width };
        places.retain(|place| place.abs() < reach - 2.0 * width);
        places.sort_by(f64::total_cmp);
        places.dedup_by(|next, kept| *next - *kept <= tolerance);
        let index = |z: f64| ((z + reach) / width) as usize;
        let spans: Vec<_> = places
            .iter()
            .map(|place| (index(place - 2.0 * tolerance), index(place + 2.0 * tolerance)))
            .collect();
        let mut touched = vec![false; GRID_CELLS];
        for &(first, last) in &spans {
            touched[first..=last].fill(true);
        }
        Self { cells, length: GRID_CELLS, places, tolerance, spans, touched }
    }

    /// One cell per lattice point.
    pub(crate) fn lattice(first: f64, span: f64, length: usize, tolerance: f64) -> Self {
        let cells = Cells::Lattice { first, span };
        Self { cells, length, places: Vec::new(), tolerance, spans: Vec::new(), touched: Vec::new() }
    }
}

/// Counts of simulated sums.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Tally {
    /// Index 0: below the window; i + 1: cell i; last: above.
    counts: Vec<u64>,
    /// Per place: sums in its cells below it, and at it.
    at_places: Vec<(u64, u64)>,
}

impl Tally {
    pub(crate) fn new(layout: &Layout) -> Self {
        Self { counts: vec![0; layout.length + 2], at_places: vec![(0, 0); layout.places.len()] }
    }

    /// Counts one sum.
    #[inline]
    pub(crate) fn add(&mut self, layout: &Layout, z: f64) {
        let position = match layout.cells {
            Cells::Grid { from, width } => (z - from) / width,
            // Truncation below rounds to the nearest point.
            Cells::Lattice { first, span } => (z - first) / span + 0.5,
        };
        // Not finite cannot happen for finite laws; an overflow counts as far out on its side.
        let slot = if position >= layout.length as f64 {
            layout.length + 1
        } else if position >= 0.0 {
            position as usize + 1
        } else {
            0
        };
        self.counts[slot] += 1;
        if slot >= 1 && slot <= layout.touched.len() && layout.touched[slot - 1] {
            self.add_at_places(layout, slot - 1, z);
        }
    }

    fn add_at_places(&mut self, layout: &Layout, cell: usize, z: f64) {
        let start = layout.spans.partition_point(|&(_, last)| last < cell);
        for index in start..layout.places.len() {
            if layout.spans[index].0 > cell {
                break;
            }
            let distance = z - layout.places[index];
            let counts = &mut self.at_places[index];
            if distance.abs() <= layout.tolerance {
                counts.1 += 1;
            } else if distance < 0.0 {
                counts.0 += 1;
            }
        }
    }

    /// Both tallies together.
    pub(crate) fn merge(mut self, other: &Self) -> Self {
        for (mine, theirs) in self.counts.iter_mut().zip(&other.counts) {
            *mine += theirs;
        }
        for (mine, theirs) in self.at_places.iter_mut().zip(&other.at_places) {
            mine.0 += theirs.0;
            mine.1 += theirs.1;
        }
        self
    }

    /// Prefix sums: entry i is the number of sums below cell i; the last entry is the number of all sums below
    /// the upper end of the window.
    pub(crate) fn cumulative(&self) -> Vec<u64> {
        self.counts[..self.counts.len() - 1]
            .iter()
            .scan(0, |sum, count| {
                *sum += count;
                Some(*sum)
            })
            .collect()
    }

    /// Number of all sums.
    pub(crate) fn total(&self) -> u64 {
        self.counts.iter().sum()
    }

    /// For each place, the number of sums below it and the number at or below it. Needs [`Tally::cumulative`].
    pub(crate) fn place_counts(&self, layout: &Layout, cumulative: &[u64]) -> Vec<(u64, u64)> {
        let add = |(&(first, _), &(below, at)): (&(usize, usize), &(u64, u64))| {
            (cumulative[first] + below, cumulative[first] + below + at)
        };
        layout.spans.iter().zip(&self.at_places).map(add).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_on_a_grid_agree_with_sorting() {
        let places = vec![-1.0, 0.0, 0.25, 0.25 + 1e-4, 3.0];
        let layout = Layout::grid(8.0, places, 1e-12);
        let mut tally = Tally::new(&layout);
        let mut values: Vec<f64> = (0..5000).map(|i| 9.5 * (f64::from(i) * 0.7371).sin()).collect();
        values.extend([0.25, 0.25, -1.0, 0.25 + 1e-4, 8.0, -8.0]);
        for &z in &values {
            tally.add(&layout, z);
        }
        let cumulative = tally.cumulative();
        assert_eq!(tally.total(), values.len() as u64);
        for (place, (below, at)) in layout.places.iter().zip(tally.place_counts(&layout, &cumulative)) {
            assert_eq!(below, values.iter().filter(|&z| z < place).count() as u64);
            assert_eq!(at, values.iter().filter(|&z| z <= place).count() as u64);
        }
        let Cells::Grid { from, width } = layout.cells else { panic!("a grid was asked for") };
        for index in [0, 1, 30_000, 65_536] {
            let edge = from + width * index as f64;
            assert_eq!(cumulative[index], values.iter().filter(|&&z| z < edge).count() as u64, "{index}");
        }
    }
}
