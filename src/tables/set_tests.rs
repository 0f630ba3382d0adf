use super::*;

#[test]
fn the_bundled_tables_load() {
    let t = Tables::load(None, None).unwrap_or_else(|e| panic!("{e}"));
    assert!(!t.bands().is_empty() && !t.comparison().is_empty());
}
