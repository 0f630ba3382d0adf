//! Continuum order and number of components judged as other people's programs judge them; files and
//! sources in `tests/external/model_choice/`.

use comagauge::alternatives::{FTest, Quality};
use comagauge::fit::WindowModel;
use comagauge::fit::solver::{Residuals, Solver, Stop};
use std::collections::BTreeMap;
use std::path::PathBuf;

type Row = BTreeMap<String, String>;

fn rows(name: &str) -> Vec<Row> {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/external");
    csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_path(folder.join(name))
        .expect("the reference file")
        .deserialize()
        .map(|r| r.expect("a row"))
        .collect()
}

fn number(row: &Row, column: &str) -> f64 {
    let text = &row[column];
    text.parse()
        .unwrap_or_else(|_| panic!("{column}: {text:?}"))
}

fn count(row: &Row, column: &str) -> usize {
    row[column].parse().expect("a count")
}

fn column(rows: &[Row], name: &str) -> Vec<f64> {
    rows.iter().map(|r| number(r, name)).collect()
}

fn close(found: f64, wanted: f64, relative: f64, what: &str) {
    let off = (found - wanted).abs();
    assert!(
        off <= relative * wanted.abs(),
        "{what}: {found:e} against {wanted:e}"
    );
}

/// χ² of this program's own fit: a continuum of an order with lines (centre, standard deviation).
fn chi2(x: &[f64], y: &[f64], sigma: &[f64], order: usize, lines: &[(f64, f64)]) -> f64 {
    let model = WindowModel::gaussians(x, y, sigma, order, lines, false);
    let start = model.start().expect("a start");
    let bounds = vec![(f64::NEG_INFINITY, f64::INFINITY); model.parameters()];
    let minimum = Solver::default().minimise(&model, &start, &bounds, Stop::tight());
    minimum.expect("a fit").chi2
}

#[test]
fn continuum_order_with_an_unknown_error() {
    let data = rows("model_choice/nile.csv");
    let (x, y) = (column(&data, "year"), column(&data, "flow"));
    let fits: Vec<(Row, Quality)> = rows("model_choice/polynomials.csv")
        .into_iter()
        .map(|row| {
            let order = count(&row, "order");
            let rss = chi2(&x, &y, &vec![1.0; x.len()], order, &[]);
            close(rss, number(&row, "rss"), 1e-9, "sum of squares");
            // The error's scale must not matter.
            let quality = Quality::unknown_error(rss, x.len(), x.len() - order - 1, 7.0);
            (row, quality)
        })
        .collect();
    assert_eq!(fits.len(), 7);
    check_sequence(&fits, "unknown");
}

#[test]
fn continuum_order_with_known_errors() {
    let data = rows("model_choice/nile.csv");
    let (x, y) = (column(&data, "year"), column(&data, "flow"));
    let sigma = column(&data, "sigma");
    let fits: Vec<(Row, Quality)> = rows("model_choice/polynomials.csv")
        .into_iter()
        .map(|row| {
            let order = count(&row, "order");
            let chi2 = chi2(&x, &y, &sigma, order, &[]);
            close(chi2, number(&row, "chi2"), 1e-9, "chi-square");
            let quality = Quality::known_errors(chi2, x.len(), x.len() - order - 1);
            (row, quality)
        })
        .collect();
    check_sequence(&fits, "known");
}

/// Differences of the criteria to order 0, and the F-test against the order before.
fn check_sequence(fits: &[(Row, Quality)], kind: &str) {
    let (first_row, first) = &fits[0];
    for pair in fits.windows(2) {
        let ((_, before), (row, quality)) = (&pair[0], &pair[1]);
        let aicc = format!("aicc_{kind}");
        let bic = format!("bic_{kind}");
        let wanted = |name: &str| number(row, name) - number(first_row, name);
        let found = quality.aicc().expect("AICc") - first.aicc().expect("AICc");
        close(found, wanted(&aicc), 1e-9, &aicc);
        let found = quality.bic().expect("BIC") - first.bic().expect("BIC");
        close(found, wanted(&bic), 1e-9, &bic);
        let test = FTest::between(before, quality).expect("nested");
        let f = number(row, &format!("f_{kind}"));
        // F is a difference of nearly equal numbers where an order brings nothing.
        assert!((test.f - f).abs() < 1e-6 * (1.0 + f), "F: {} {f}", test.f);
        let p = number(row, &format!("p_{kind}"));
        assert!((test.p / p - 1.0).abs() < 1e-4, "p: {} {p}", test.p);
    }
}

#[test]
fn number_of_components() {
    let table = rows("model_choice/components.csv");
    let mut before: Option<(String, Quality, Row)> = None;
    let mut tests = 0;
    for row in table {
        let data = rows(&format!("nist_nls/{}.csv", row["problem"]));
        let (x, y) = (column(&data, "x"), column(&data, "y"));
        let lines: Vec<(f64, f64)> = row["start"]
            .split(';')
            .filter_map(|s| s.split_once(':'))
            .map(|(c, w)| (c.parse().expect("centre"), w.parse().expect("width")))
            .collect();
        assert_eq!(lines.len(), count(&row, "components"));
        let chi2 = chi2(&x, &y, &vec![1.0; x.len()], 3, &lines);
        let what = format!("{} with {}", row["problem"], row["components"]);
        close(chi2, number(&row, "chi2"), 1e-7, &what);
        let quality = Quality::unknown_error(chi2, count(&row, "n"), count(&row, "dof"), 1.0);
        if let Some((problem, smaller, small_row)) = &before
            && *problem == row["problem"]
        {
            let test = FTest::between(smaller, &quality).expect("nested");
            close(test.f, number(&row, "f"), 1e-6, &what);
            close(test.p, number(&row, "p"), 1e-3, &what);
            assert_eq!(test.more, 3);
            let found = quality.bic().expect("BIC") - smaller.bic().expect("BIC");
            let wanted = number(&row, "bic") - number(small_row, "bic");
            close(found, wanted, 1e-6, &format!("BIC of {what}"));
            tests += 1;
        }
        before = Some((row["problem"].clone(), quality, row));
    }
    assert_eq!(tests, 6);
}

#[test]
fn probabilities_of_f() {
    let table = rows("model_choice/f_tests.csv");
    assert_eq!(table.len(), 10);
    for row in &table {
        let quality = |chi2: &str, dof: &str, n: usize| {
            Quality::known_errors(number(row, chi2), n, count(row, dof))
        };
        let n = count(row, "dof_smaller") + 3;
        let test = FTest::between(
            &quality("chi2_smaller", "dof_smaller", n),
            &quality("chi2_larger", "dof_larger", n),
        )
        .expect("nested");
        let (f, p) = (number(row, "f"), number(row, "p"));
        close(test.f, f, 1e-12, "F");
        assert!((test.p - p).abs() <= 1e-8 * p, "p: {:e} {p:e}", test.p);
    }
}
