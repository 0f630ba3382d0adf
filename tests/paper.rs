//! `comagauge paper` as a user runs it: both demos, hostile labels, verification, refusals.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn run(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_comagauge"))
        .args(arguments)
        .output()
        .expect("the program starts")
}

fn text(path: impl AsRef<Path>) -> String {
    fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.as_ref().display()))
}

fn word(path: &Path) -> &str {
    path.to_str().expect("a UTF-8 path")
}

/// A copy of a demo in a folder of its own, measured.
struct Case {
    folder: tempfile::TempDir,
}

impl Case {
    fn measured(demo: &str, change: impl Fn(String) -> String) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let from = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-spectra");
        for name in ["infrared.csv", "optical.txt"] {
            fs::copy(from.join(name), folder.path().join(name)).expect("a copy");
        }
        let plan = change(text(from.join(format!("{demo}.toml"))));
        fs::write(folder.path().join("plan.toml"), plan).expect("a plan");
        let case = Self { folder };
        let done = run(&["measure", word(&case.path("plan.toml"))]);
        assert!(done.status.success(), "{}", errors(&done));
        case
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn result(&self) -> PathBuf {
        self.path("plan-results/result.json")
    }

    fn kit(&self) -> PathBuf {
        let out = self.path("kit");
        let done = run(&["paper", word(&self.result()), "--out", word(&out)]);
        assert!(done.status.success(), "{}", errors(&done));
        out
    }
}

fn errors(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

fn is_in(bytes: &[u8], what: &[u8]) -> bool {
    bytes.windows(what.len()).any(|w| w == what)
}

#[test]
fn the_kits_of_both_demos_are_whole() {
    for (demo, figures) in [
        (
            "infrared",
            &["fit", "standing", "posterior", "profile", "plane"][..],
        ),
        ("optical", &["fit", "standing", "posterior", "profile"]),
    ] {
        let case = Case::measured(demo, |plan| plan);
        let kit = case.kit();
        for name in figures
            .iter()
            .flat_map(|f| [(*f).to_owned(), format!("{f}-narrow")])
        {
            let pdf = fs::read(kit.join(format!("{name}.pdf"))).expect("a PDF");
            assert!(pdf.starts_with(b"%PDF"), "{demo} {name}");
            for needed in [&b"/FontFile2"[..], b"DejaVuSans", b"plan_sha256"] {
                assert!(is_in(&pdf, needed), "{demo} {name}");
            }
            let png = fs::read(kit.join(format!("{name}.png"))).expect("a PNG");
            let number = |at: usize| u32::from_be_bytes(png[at..at + 4].try_into().expect("four"));
            let expected = if name.ends_with("narrow") { 1050 } else { 2130 };
            assert!(
                number(16).abs_diff(expected) <= 1,
                "{demo} {name}: {}",
                number(16)
            );
            assert!(is_in(&png, b"pHYs") && is_in(&png, b"plan_sha256"));
            assert!(text(kit.join(format!("{name}.svg"))).contains("plan_sha256"));
        }
        for name in ["bands", "species", "ratios"] {
            assert!(text(kit.join(format!("{name}.tex"))).contains("\\begin{tabular}"));
            assert!(text(kit.join(format!("{name}-deluxe.tex"))).contains("\\begin{deluxetable}"));
        }
        let page = fs::metadata(kit.join("report.html")).expect("a page").len();
        assert!(page < 2_000_000, "{demo}: {page} bytes");
        for name in [
            "report.html",
            "methods.md",
            "methods.tex",
            "sources.bib",
            "draft.tex",
        ] {
            let content = text(kit.join(name));
            assert!(
                content.contains("comagauge 0.") && content.contains("seed"),
                "{name}"
            );
        }
    }
}

/// Header fields and rows of an ECSV file.
fn ecsv(text: &str) -> (Vec<(String, Option<String>)>, Vec<csv::StringRecord>) {
    assert!(text.starts_with("# %ECSV 1.0\n# ---\n"));
    let part = |line: &str, key: &str| {
        let rest = line.split_once(&format!("{key}: "))?.1;
        let rest = rest.trim_start_matches('\'');
        Some(rest.split([',', '\'', '}']).next()?.to_owned())
    };
    let fields: Vec<_> = text
        .lines()
        .filter(|l| l.starts_with("# - {name"))
        .map(|l| (part(l, "name").expect("a name"), part(l, "unit")))
        .collect();
    let body: String = text
        .lines()
        .filter(|l| !l.starts_with('#'))
        .map(|l| format!("{l}\n"))
        .collect();
    let mut reader = csv::Reader::from_reader(body.as_bytes());
    let header: Vec<String> = reader
        .headers()
        .expect("names")
        .iter()
        .map(str::to_owned)
        .collect();
    assert_eq!(
        header,
        fields.iter().map(|f| f.0.clone()).collect::<Vec<_>>()
    );
    let rows = reader.records().collect::<Result<_, _>>().expect("rows");
    (fields, rows)
}

#[test]
fn tables_for_machines_hold_the_result() {
    let case = Case::measured("infrared", |plan| plan);
    let kit = case.kit();
    let (fields, rows) = ecsv(&text(kit.join("ratios.ecsv")));
    let result: serde_json::Value = serde_json::from_str(&text(case.result())).expect("JSON");
    let at = |name: &str| fields.iter().position(|f| f.0 == name).expect("a column");
    for (row, ratio) in rows
        .iter()
        .zip(result["ratios"].as_array().expect("ratios"))
    {
        assert_eq!(row[at("of")], *ratio["of"].as_str().expect("text"));
        let median: f64 = row[at("median")].parse().expect("a number");
        assert_eq!(Some(median), ratio["median"].as_f64());
        assert!(row[at("limit")].is_empty());
    }
    assert_eq!(rows.len(), 3);
    let (fields, _) = ecsv(&text(kit.join("bands.ecsv")));
    let flux = fields.iter().find(|f| f.0 == "flux").expect("fluxes");
    assert_eq!(flux.1.as_deref(), Some("erg / (s cm2)"));
}

#[test]
fn citations_and_references_agree() {
    let case = Case::measured("optical", |plan| plan);
    let kit = case.kit();
    let bib = text(kit.join("sources.bib"));
    let keys: Vec<&str> = bib
        .lines()
        .filter_map(|l| l.strip_prefix('@')?.split_once('{')?.1.strip_suffix(','))
        .collect();
    let tex = text(kit.join("methods.tex"));
    let mut cited: Vec<&str> = tex
        .split("\\citep{")
        .skip(1)
        .flat_map(|t| t.split('}').next().unwrap_or("").split(','))
        .collect();
    cited.sort_unstable();
    cited.dedup();
    let mut listed = keys.clone();
    listed.sort_unstable();
    assert_eq!(cited, listed);
    assert!(keys.contains(&"haser1957") && keys.len() > 5, "{keys:?}");
    assert_eq!(bib.matches('{').count(), bib.matches('}').count());
}

#[test]
fn a_hostile_label_stays_text() {
    let hostile = r#"<script>alert(1)</script> & \\input{x} % ☄"#;
    let case = Case::measured("infrared", |plan| plan.replace("C/2031 A1", hostile));
    let kit = case.kit();
    let page = text(kit.join("report.html"));
    assert!(page.contains("&lt;script&gt;alert(1)"));
    assert!(!page.contains("<script>alert"));
    assert_eq!(page.matches("<script>").count(), 1);
    let draft = text(kit.join("draft.tex"));
    assert!(!draft.contains("\\input{x}") && draft.contains("\\textbackslash{}input\\{x\\}"));
    ecsv(&text(kit.join("species.ecsv")));
}

#[test]
fn verification_notices_what_changed() {
    let case = Case::measured("infrared", |plan| plan);
    let kit = case.kit();
    let verify = || run(&["paper", "--verify", word(&kit)]);
    let fine = verify();
    assert!(fine.status.success(), "{}", errors(&fine));
    assert!(String::from_utf8_lossy(&fine.stdout).contains("follow from the data"));

    // The author's own text may change, a table may not.
    let draft = kit.join("draft.tex");
    fs::write(&draft, text(&draft) + "% mine\n").expect("written");
    let edited = verify();
    assert!(edited.status.success());
    assert!(String::from_utf8_lossy(&edited.stdout).contains("draft.tex was edited"));
    let table = kit.join("ratios.tex");
    let before = text(&table);
    fs::write(&table, before.replace("0.158", "0.258")).expect("written");
    let forged = verify();
    assert_eq!(forged.status.code(), Some(1));
    assert!(
        errors(&forged).contains("ratios.tex was edited"),
        "{}",
        errors(&forged)
    );
    fs::write(&table, before).expect("written");

    // One digit of one sample.
    let spectrum = case.path("infrared.csv");
    let data = text(&spectrum);
    let line = data.lines().nth(data.lines().count() / 2).expect("a line");
    let at = data.find(line).expect("there") + line.find('.').expect("a number") + 12;
    let mut bytes = data.clone().into_bytes();
    bytes[at] = if bytes[at] == b'5' { b'6' } else { b'5' };
    fs::write(&spectrum, bytes).expect("written");
    let changed = verify();
    assert_eq!(changed.status.code(), Some(1));
    assert!(errors(&changed).contains("infrared.csv has changed: sha256 was"));
    let refused = run(&[
        "paper",
        word(&case.result()),
        "--out",
        word(&case.path("new")),
    ]);
    assert_eq!(refused.status.code(), Some(1));
    assert!(errors(&refused).contains("no longer give this result"));
    assert!(!case.path("new").exists());
    fs::write(&spectrum, data).expect("written");
    assert!(verify().status.success());
}

#[test]
fn results_and_spectra_may_be_moved_together() {
    let case = Case::measured("infrared", |plan| plan);
    let moved = case.path("moved");
    fs::rename(case.path("plan-results"), &moved).expect("moved");
    fs::rename(case.path("infrared.csv"), moved.join("infrared.csv")).expect("moved");
    let result = moved.join("result.json");
    let done = run(&["paper", word(&result), "--out", word(&case.path("kit"))]);
    assert!(done.status.success(), "{}", errors(&done));
    fs::remove_file(moved.join("infrared.csv")).expect("removed");
    let gone = run(&["paper", word(&result)]);
    assert_eq!(gone.status.code(), Some(1));
    assert!(errors(&gone).contains("is gone") && errors(&gone).contains("remedy"));
}

#[test]
fn several_dates_make_one_kit() {
    let case = Case::measured("infrared", |plan| plan);
    let later = |plan: String| {
        plan.replace("2031-04-17", "2031-04-19")
            .replace("1.82", "1.80")
    };
    let other = Case::measured("infrared", later);
    let out = case.path("kit");
    let done = run(&[
        "paper",
        word(&case.result()),
        word(&other.result()),
        "--out",
        word(&out),
    ]);
    assert!(done.status.success(), "{}", errors(&done));
    for name in [
        "fit-1.pdf",
        "fit-2.pdf",
        "standing-2-narrow.pdf",
        "plane.pdf",
    ] {
        assert!(out.join(name).is_file(), "{name}");
    }
    assert_eq!(ecsv(&text(out.join("ratios.ecsv"))).1.len(), 6);
    assert!(run(&["paper", "--verify", word(&out)]).status.success());
}

#[test]
fn what_is_no_result_is_refused() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("result.json");
    let refused = |needle: &str| {
        let done = run(&["paper", word(&file)]);
        assert_eq!(done.status.code(), Some(1), "{needle}");
        assert!(errors(&done).contains(needle), "{}", errors(&done));
    };
    refused("cannot read");
    fs::write(&file, "{\"program\": 3}").expect("written");
    refused("not a result of comagauge measure");
    fs::write(&file, "{\"program\": \"other 1.0\", \"inputs\": []}").expect("written");
    refused("it was written by \"other 1.0\"");
    fs::write(&file, "{\"program\": \"comagauge 0.0.1\", \"inputs\": []}").expect("written");
    refused("the plan behind this result is missing");
    let none = run(&["paper", "--verify", word(folder.path())]);
    assert_eq!(none.status.code(), Some(1));
    assert!(errors(&none).contains("give a folder that comagauge paper wrote"));
    assert_eq!(run(&["paper"]).status.code(), Some(2));
}
