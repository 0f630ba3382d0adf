//! Tables for print as plain data; LaTeX and HTML are made from them.

use super::latex::tex;
use super::rounding::{Rounded, bare, rounded, with_power};
use super::stamp::Stamp;

/// A cell.
#[derive(Clone, Debug)]
pub(super) enum Cell {
    /// Nothing known.
    Blank,
    /// Words, plain Unicode.
    Text(String),
    /// A number, with the number that orders it.
    Number(Rounded, f64),
    /// A number known to be below (`<`) or above (`>`) this.
    Limit(char, Rounded, f64),
}

/// A column.
#[derive(Clone, Debug)]
pub(super) struct Column {
    /// Name, plain Unicode.
    pub title: String,
    /// Unit as printed; empty for none.
    pub unit: String,
}

/// A table.
#[derive(Clone, Debug)]
pub(super) struct Table {
    /// File name without ending, also the label.
    pub name: &'static str,
    /// What it lists.
    pub caption: String,
    /// Remarks under the table.
    pub note: String,
    /// Columns.
    pub columns: Vec<Column>,
    /// Rows, as long as the columns.
    pub rows: Vec<Vec<Cell>>,
}

impl Cell {
    /// Words.
    pub(super) fn text(text: impl Into<String>) -> Self {
        Self::Text(text.into())
    }

    /// A number without error, to three digits.
    pub(super) fn bare(value: Option<f64>) -> Self {
        match value.filter(|v| v.is_finite()) {
            Some(v) => Self::Number(bare(v), v),
            None => Self::Blank,
        }
    }

    /// A value with its errors.
    pub(super) fn value(value: f64, minus: f64, plus: f64) -> Self {
        if value.is_finite() {
            Self::Number(rounded(value, minus, plus), value)
        } else {
            Self::Blank
        }
    }

    /// A limit.
    pub(super) fn limit(sign: char, value: Option<f64>) -> Self {
        match value.filter(|v| v.is_finite()) {
            Some(v) => Self::Limit(sign, bare(v), v),
            None => Self::Blank,
        }
    }

    /// What orders the cell among its column, when it is a number.
    pub(super) fn order(&self) -> Option<f64> {
        match self {
            Self::Number(_, v) | Self::Limit(_, _, v) => Some(*v),
            _ => None,
        }
    }

    /// The cell as plain Unicode.
    pub(super) fn plain(&self) -> String {
        let minus = |s: &str| s.replace('-', "−");
        match self {
            Self::Blank => "–".to_owned(),
            Self::Text(t) => t.clone(),
            Self::Limit(sign, r, _) => {
                format!("{sign} {}", with_power(&minus(&r.value), r.exponent))
            }
            Self::Number(r, _) => {
                let core = match &r.errors {
                    None => minus(&r.value),
                    Some((a, b)) if a == b => format!("{} ± {a}", minus(&r.value)),
                    Some((a, b)) => format!("{} (−{a}, +{b})", minus(&r.value)),
                };
                if r.errors.is_some() && r.exponent != 0 {
                    with_power(&format!("({core})"), r.exponent)
                } else {
                    with_power(&core, r.exponent)
                }
            }
        }
    }

    fn latex(&self) -> String {
        let power = |e: i32| {
            if e == 0 {
                String::new()
            } else {
                format!(r"\times 10^{{{e}}}")
            }
        };
        match self {
            Self::Blank => r"\ldots".to_owned(),
            Self::Text(t) => tex(t),
            Self::Limit(sign, r, _) => format!("${sign}{}{}$", r.value, power(r.exponent)),
            Self::Number(r, _) => {
                let core = match &r.errors {
                    None => r.value.clone(),
                    Some((a, b)) if a == b => format!(r"{} \pm {a}", r.value),
                    Some((a, b)) => format!("{}_{{-{a}}}^{{+{b}}}", r.value),
                };
                if r.errors.is_some() && r.exponent != 0 {
                    format!("$({core}){}$", power(r.exponent))
                } else {
                    format!("${core}{}$", power(r.exponent))
                }
            }
        }
    }
}

impl Table {
    /// `name = value` of every row, the first number with the cell before it, for running text.
    pub(super) fn statements(&self) -> Vec<String> {
        let of = |row: &Vec<Cell>| {
            let at = row.iter().position(|c| c.order().is_some())?;
            let name = at.checked_sub(1).map(|i| row[i].latex())?;
            let sign = match row[at] {
                Cell::Limit(..) => "",
                _ => "$=$ ",
            };
            Some(format!("{name} {sign}{}", row[at].latex()))
        };
        self.rows.iter().filter_map(of).collect()
    }

    fn alignment(&self) -> String {
        let words = |i: usize| self.rows.iter().any(|r| matches!(r[i], Cell::Text(_)));
        (0..self.columns.len())
            .map(|i| if words(i) { 'l' } else { 'c' })
            .collect()
    }

    fn body(&self) -> String {
        let row = |r: &Vec<Cell>| r.iter().map(Cell::latex).collect::<Vec<_>>().join(" & ");
        self.rows
            .iter()
            .map(row)
            .collect::<Vec<_>>()
            .join(" \\\\\n")
    }

    /// `tabular` with nothing but basic LaTeX, for `\input` inside a table environment.
    pub(super) fn tabular(&self, stamp: &Stamp) -> String {
        let heads = |f: &dyn Fn(&Column) -> String| {
            self.columns.iter().map(f).collect::<Vec<_>>().join(" & ")
        };
        let names = heads(&|c| tex(&c.title));
        let units = if self.columns.iter().all(|c| c.unit.is_empty()) {
            String::new()
        } else {
            let unit = |c: &Column| {
                if c.unit.is_empty() {
                    String::new()
                } else {
                    format!("({})", tex(&c.unit))
                }
            };
            heads(&unit) + " \\\\\n"
        };
        format!(
            "{}\\begin{{tabular}}{{{}}}\n\\hline\\hline\n{names} \\\\\n{units}\\hline\n{} \\\\\n\\hline\n\\end{{tabular}}\n",
            stamp.comment("%"),
            self.alignment(),
            self.body()
        )
    }

    /// The `deluxetable` environment of journal classes, with caption and notes.
    pub(super) fn deluxe(&self, stamp: &Stamp) -> String {
        let heads: Vec<String> = self
            .columns
            .iter()
            .map(|c| {
                if c.unit.is_empty() {
                    format!("\\colhead{{{}}}", tex(&c.title))
                } else {
                    format!("\\colhead{{{} ({})}}", tex(&c.title), tex(&c.unit))
                }
            })
            .collect();
        format!(
            "{}\\begin{{deluxetable}}{{{}}}\n\\tablecaption{{{}\\label{{tab:{}}}}}\n\\tablehead{{{}}}\n\\startdata\n{}\n\\enddata\n\\tablecomments{{{}}}\n\\end{{deluxetable}}\n",
            stamp.comment("%"),
            self.alignment(),
            tex(&self.caption),
            self.name,
            heads.join(" & "),
            self.body(),
            tex(&self.note)
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cells_in_both_forms() {
        let c = Cell::value(0.1575, 0.0315, 0.0386);
        assert_eq!(c.latex(), "$0.158_{-0.032}^{+0.039}$");
        assert_eq!(c.plain(), "0.158 (−0.032, +0.039)");
        let c = Cell::value(3.424e27, 4.586e26, 4.586e26);
        assert_eq!(c.latex(), r"$(3.4 \pm 0.5)\times 10^{27}$");
        assert_eq!(c.plain(), "(3.4 ± 0.5) × 10²⁷");
        assert_eq!(Cell::limit('<', Some(0.052)).latex(), "$<0.0520$");
        assert_eq!(Cell::limit('<', None).latex(), r"\ldots");
    }

    #[test]
    fn a_hostile_label_cannot_leave_its_cell() {
        let table = Table {
            name: "t",
            caption: "a & b".into(),
            note: "50 %".into(),
            columns: vec![Column {
                title: "x_1".into(),
                unit: "cm⁻²".into(),
            }],
            rows: vec![vec![Cell::text(r"\end{tabular} & %")]],
        };
        let stamp = Stamp::new([]);
        let text = table.tabular(&stamp);
        assert_eq!(text.matches(r"\end{tabular}").count(), 1);
        assert!(table.deluxe(&stamp).contains(r"\tablecaption{a \& b"));
        assert!(text.contains("(cm$^{-2}$)"));
    }
}
