//! Pages, reports and curves of an assessment.
