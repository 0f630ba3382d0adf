//! `comagauge geometry`: where a comet is over dates, from an orbit.

use super::output;
use crate::figures::{
    Curve, CurveFigure, Scale as AxisScale, Tick, VerticalMark, Width, range_svg,
};
use crate::frame::orbit::{Elements, Instant, Orbit, Scale, Site, Sky, observe};
use crate::ground::{Error, Result};
use crate::plan::{instant, orbit, read_plan, site};
use crate::report::write_all;
use clap::Args;
use std::fmt::Write;
use std::path::PathBuf;

/// Most rows of a table.
const MOST_ROWS: usize = 200_000;

/// Arguments of `geometry`.
#[derive(Args)]
#[command(after_long_help = EXAMPLE)]
pub(super) struct Geometry {
    /// A plan with [comet.orbit] or [comet.state]; flags below take the place of its numbers.
    plan: Option<PathBuf>,
    /// A date (UTC), as 2031-04-17, 2031-04-17T05:12:30 or a Julian date; may be repeated.
    #[arg(long, value_name = "DATE")]
    date: Vec<String>,
    /// First date of a table.
    #[arg(long, value_name = "DATE", requires = "to")]
    from: Option<String>,
    /// Last date of a table.
    #[arg(long, value_name = "DATE", requires = "from")]
    to: Option<String>,
    /// Days between the rows.
    #[arg(long, value_name = "DAYS", default_value_t = 10.0)]
    step: f64,
    /// Perihelion distance, au.
    #[arg(long, value_name = "AU", allow_negative_numbers = true)]
    perihelion_au: Option<f64>,
    /// Eccentricity.
    #[arg(long, allow_negative_numbers = true)]
    eccentricity: Option<f64>,
    /// Inclination, degrees (ecliptic J2000).
    #[arg(long, value_name = "DEG", allow_negative_numbers = true)]
    inclination_deg: Option<f64>,
    /// Longitude of the ascending node, degrees.
    #[arg(long, value_name = "DEG", allow_negative_numbers = true)]
    node_deg: Option<f64>,
    /// Argument of perihelion, degrees.
    #[arg(long, value_name = "DEG", allow_negative_numbers = true)]
    argument_deg: Option<f64>,
    /// Time of perihelion (TDB).
    #[arg(long, value_name = "DATE")]
    perihelion_time: Option<String>,
    /// Epoch of the elements (TDB).
    #[arg(long, value_name = "DATE")]
    epoch: Option<String>,
    /// Longitude of the observatory, degrees, positive to the east.
    #[arg(
        long,
        value_name = "DEG",
        requires = "latitude_deg",
        allow_negative_numbers = true
    )]
    longitude_deg: Option<f64>,
    /// Its latitude, degrees.
    #[arg(
        long,
        value_name = "DEG",
        requires = "longitude_deg",
        allow_negative_numbers = true
    )]
    latitude_deg: Option<f64>,
    /// Its height, m.
    #[arg(
        long,
        value_name = "M",
        default_value_t = 0.0,
        allow_negative_numbers = true
    )]
    height_m: f64,
    /// Write a figure of distances and rates against time.
    #[arg(long, value_name = "FILE.svg")]
    figure: Option<PathBuf>,
    /// Print as CSV.
    #[arg(long)]
    csv: bool,
}

const EXAMPLE: &str = "\
Example:
  comagauge geometry --perihelion-au 0.98 --eccentricity 1.0 --inclination-deg 62 \\
    --node-deg 203 --argument-deg 118 --perihelion-time 2031-07-02.4 \\
    --from 2031-05-01 --to 2031-07-01 --step 10";

impl Geometry {
    pub(super) fn run(self) -> Result<()> {
        let (orbit, site, dates) = self.gather()?;
        let rows = dates
            .iter()
            .map(|when| observe(&orbit, when, site.as_ref()).map(|sky| (*when, sky)))
            .collect::<Result<Vec<_>>>()?;
        output::print(&if self.csv { csv(&rows) } else { table(&rows) })?;
        if let Some(v) = orbit.v_infinity_km_s().filter(|v| *v > 0.0) {
            output::complain(&format!(
                "the orbit is hyperbolic: speed far from the Sun (v_inf) {v:.3} km/s"
            ));
        }
        let far = rows
            .iter()
            .filter_map(|(_, s)| s.days_from_epoch)
            .map(f64::abs)
            .fold(0.0, f64::max);
        if far > 100.0 {
            output::complain(&format!(
                "caveat: up to {far:.0} days from the epoch of the elements; two-body motion, no perturbations"
            ));
        }
        if let Some(path) = &self.figure {
            let svg = figure(&orbit, &rows)?;
            let folder = path.parent().unwrap_or(std::path::Path::new("."));
            let name = path
                .file_name()
                .and_then(|n| n.to_str())
                .ok_or_else(|| Error::plan("--figure names no file"))?;
            write_all(folder, &[(name, svg.into_bytes())])?;
            output::complain(&format!("figure in {}", path.display()));
        }
        Ok(())
    }

    fn gather(&self) -> Result<(Orbit, Option<Site>, Vec<Instant>)> {
        let plan = self.plan.as_deref().map(read_plan).transpose()?;
        let comet = plan.as_ref().map(|f| &f.plan.comet);
        let orbit = match self.elements()? {
            Some(orbit) => orbit,
            None => comet.map(orbit).transpose()?.flatten().ok_or_else(|| {
                Error::plan("no orbit is given").remedy(
                    "name a plan with [comet.orbit], or give --perihelion-au, --eccentricity, --inclination-deg, --node-deg, --argument-deg and --perihelion-time",
                )
            })?,
        };
        let site = match (self.longitude_deg, self.latitude_deg) {
            (Some(longitude), Some(latitude)) => {
                Some(Site::new(longitude, latitude, self.height_m)?)
            }
            _ => site(comet.and_then(|c| c.site.as_ref()))?,
        };
        let mut dates = self
            .date
            .iter()
            .map(|d| Instant::parse(d, Scale::Utc))
            .collect::<Result<Vec<_>>>()?;
        if let (Some(from), Some(to)) = (&self.from, &self.to) {
            dates.extend(self.series(from, to)?);
        }
        if dates.is_empty()
            && let Some(date) = comet.and_then(|c| c.date.as_ref())
        {
            dates.push(instant(date, Scale::Utc)?);
        }
        if dates.is_empty() {
            return Err(Error::plan("no date is given")
                .remedy("give --date, or --from and --to, or a plan with a date"));
        }
        Ok((orbit, site, dates))
    }

    fn elements(&self) -> Result<Option<Orbit>> {
        let numbers = [
            ("--perihelion-au", self.perihelion_au),
            ("--eccentricity", self.eccentricity),
            ("--inclination-deg", self.inclination_deg),
            ("--node-deg", self.node_deg),
            ("--argument-deg", self.argument_deg),
        ];
        if numbers.iter().all(|(_, v)| v.is_none()) && self.perihelion_time.is_none() {
            return Ok(None);
        }
        let mut missing: Vec<&str> = numbers
            .iter()
            .filter(|(_, v)| v.is_none())
            .map(|(n, _)| *n)
            .collect();
        if self.perihelion_time.is_none() {
            missing.push("--perihelion-time");
        }
        if !missing.is_empty() {
            return Err(Error::plan(format!(
                "the orbit lacks {}",
                missing.join(", ")
            )));
        }
        let value = |i: usize| numbers[i].1.expect("invariant: missing ones were refused");
        let jd = |text: &String| Instant::parse(text, Scale::Tdb).map(|i| i.jd(Scale::Tdb));
        let elements = Elements {
            perihelion_au: value(0),
            eccentricity: value(1),
            inclination_deg: value(2),
            node_deg: value(3),
            argument_deg: value(4),
            perihelion_time_jd_tdb: jd(self.perihelion_time.as_ref().expect("invariant: checked"))?,
            epoch_jd_tdb: self.epoch.as_ref().map(jd).transpose()?,
        };
        elements.orbit().map(Some)
    }

    fn series(&self, from: &str, to: &str) -> Result<Vec<Instant>> {
        let (first, last) = (
            Instant::parse(from, Scale::Utc)?,
            Instant::parse(to, Scale::Utc)?,
        );
        let days = last.jd(Scale::Utc) - first.jd(Scale::Utc);
        if !(self.step > 0.0 && self.step.is_finite()) || days < 0.0 {
            return Err(Error::plan(format!(
                "--from {from} --to {to} --step {} is not a rising series",
                self.step
            ))
            .remedy("--to must not be before --from, and --step is a positive number of days"));
        }
        let count = (days / self.step + 1e-9).floor() as usize + 1;
        if count > MOST_ROWS {
            return Err(Error::plan(format!(
                "the table would have {count} rows, more than {MOST_ROWS}"
            ))
            .remedy("make --step longer"));
        }
        let (day, part) = first.two_part(Scale::Utc);
        (0..count)
            .map(|i| Instant::from_jd(day, part + self.step * i as f64, Scale::Utc))
            .collect()
    }
}

fn csv(rows: &[(Instant, Sky)]) -> String {
    let mut out = String::from(
        "date_utc,jd_utc,heliocentric_au,heliocentric_km_s,observer_au,observer_km_s,phase_deg,elongation_deg,light_time_s,ra_deg,dec_deg,sun_position_angle_deg,antisolar_position_angle_deg,velocity_position_angle_deg,motion_arcsec_per_h,motion_position_angle_deg\n",
    );
    for (when, s) in rows {
        writeln!(
            out,
            "{},{:.9},{:.10},{:.8},{:.10},{:.8},{:.7},{:.7},{:.4},{:.7},{:.7},{:.5},{:.5},{:.5},{:.5},{:.5}",
            when.utc_text(),
            when.jd(Scale::Utc),
            s.heliocentric_au,
            s.heliocentric_km_s,
            s.observer_au,
            s.observer_km_s,
            s.phase_deg,
            s.elongation_deg,
            s.light_time_s,
            s.ra_deg,
            s.dec_deg,
            s.sun_position_angle_deg,
            s.antisolar_position_angle_deg,
            s.velocity_position_angle_deg,
            s.motion_arcsec_per_h,
            s.motion_position_angle_deg
        )
        .expect("invariant: writing to memory");
    }
    out
}

fn table(rows: &[(Instant, Sky)]) -> String {
    let mut out = format!(
        "{:19} {:>9} {:>9} {:>9} {:>9} {:>7} {:>7} {:>9} {:>8} {:>7} {:>9}\n{:19} {:>9} {:>9} {:>9} {:>9} {:>7} {:>7} {:>9} {:>8} {:>7} {:>9}\n",
        "date UTC",
        "r_h",
        "ṙ_h",
        "Δ",
        "Δ̇ ",
        "phase",
        "elong.",
        "RA",
        "Dec",
        "PA Sun",
        "motion",
        "",
        "au",
        "km/s",
        "au",
        "km/s",
        "°",
        "°",
        "°",
        "°",
        "°",
        "″/h"
    );
    for (when, s) in rows {
        writeln!(
            out,
            "{:19} {:9.6} {:9.4} {:9.6} {:9.4} {:7.3} {:7.3} {:9.4} {:8.4} {:7.2} {:9.3}",
            when.utc_text().get(..19).unwrap_or_default(),
            s.heliocentric_au,
            s.heliocentric_km_s,
            s.observer_au,
            s.observer_km_s,
            s.phase_deg,
            s.elongation_deg,
            s.ra_deg,
            s.dec_deg,
            s.sun_position_angle_deg,
            s.motion_arcsec_per_h
        )
        .expect("invariant: writing to memory");
    }
    out
}

/// r_h and Δ in au with ṙ_h in 10 km/s, which share one axis.
fn figure(orbit: &Orbit, rows: &[(Instant, Sky)]) -> Result<String> {
    if rows.len() < 2 {
        return Err(Error::plan("a figure needs at least two dates").remedy("give --from and --to"));
    }
    let first = rows[0].0.jd(Scale::Utc);
    let x: Vec<f64> = rows.iter().map(|(w, _)| w.jd(Scale::Utc) - first).collect();
    let curve = |label: &str, value: fn(&Sky) -> f64| Curve {
        label: label.to_owned(),
        x: x.clone(),
        y: rows.iter().map(|(_, s)| value(s)).collect(),
    };
    let perihelion = rows[0].0.jd(Scale::Tdb) - orbit.days_from_perihelion(&rows[0].0) - first;
    let marks = Some(perihelion)
        .filter(|at| *at > x[0] && *at < x[x.len() - 1])
        .map(|at| VerticalMark {
            x: at,
            label: "perihelion".to_owned(),
        })
        .into_iter()
        .collect();
    let every = (rows.len() / 6).max(1);
    let figure = CurveFigure {
        title: String::new(),
        x_label: "Date (UTC)".to_owned(),
        y_quantity: "Distance (au); rate".to_owned(),
        y_unit: "10 km s⁻¹".to_owned(),
        x_scale: AxisScale::Linear,
        y_scale: AxisScale::Linear,
        curves: vec![
            curve("r_h", |s| s.heliocentric_au),
            curve("Δ", |s| s.observer_au),
            curve("ṙ_h / 10 km/s", |s| s.heliocentric_km_s / 10.0),
        ],
        marks,
        x_ticks: rows
            .iter()
            .zip(&x)
            .step_by(every)
            .map(|((when, _), x)| Tick {
                x: *x,
                label: when.utc_text()[..10].to_owned(),
            })
            .collect(),
    };
    range_svg(&figure, Width::Double)
}
