//! Helpers shared by the checks against published and independent sources.
