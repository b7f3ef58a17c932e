//! Monte Carlo: standardized sums and studentized statistics.
