//! Floor 4: continuum and bands fitted together.
