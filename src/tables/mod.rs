//! Floor 1: every number taken from literature.
