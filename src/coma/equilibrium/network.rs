//! From lines and a radiation field to the rates between the levels that matter.

use super::result::Dropped;
use crate::atomic::LevelSystem;

/// Rates along one line: up, down (s⁻¹ per atom in the level it leaves).
#[derive(Clone, Copy, Debug)]
pub(super) struct Rates {
    pub up_per_s: f64,
    pub down_per_s: f64,
}

/// Upward (g_u/g_l) A n̄, downward A (1 + n̄), with A and n̄ of line `i` multiplied by `factor_a(i)`
/// and `factor_n(i)`.
pub(super) fn rates(system: &LevelSystem, occupation: &[f64], a_per_s: &[f64]) -> Vec<Rates> {
    let levels = system.levels();
    let of_line = |((line, n), a): ((&crate::atomic::Line, &f64), &f64)| Rates {
        up_per_s: levels[line.upper].weight / levels[line.lower].weight * a * n,
        down_per_s: a * (1.0 + n),
    };
    system
        .lines()
        .iter()
        .zip(occupation)
        .zip(a_per_s)
        .map(of_line)
        .collect()
}

/// The levels that exchange population with the ground level, lowest first, and the others.
pub(super) struct Connected {
    /// Position of each level in the chain, or `None`.
    pub position: Vec<Option<usize>>,
    /// Levels in the chain.
    pub kept: Vec<usize>,
    pub dropped: Vec<Dropped>,
}

/// Keeps the levels that the ground level feeds and that can return to it.
pub(super) fn connected(system: &LevelSystem, rates: &[Rates]) -> Connected {
    let levels = system.levels().len();
    let mut forward = vec![Vec::new(); levels];
    let mut backward = vec![Vec::new(); levels];
    for (line, rate) in system.lines().iter().zip(rates) {
        let mut edge = |from: usize, to: usize, rate: f64| {
            if rate > 0.0 {
                forward[from].push(to);
                backward[to].push(from);
            }
        };
        edge(line.lower, line.upper, rate.up_per_s);
        edge(line.upper, line.lower, rate.down_per_s);
    }
    let fed = reached(&forward);
    let returns = reached(&backward);
    let mut result = Connected {
        position: vec![None; levels],
        kept: Vec::new(),
        dropped: Vec::new(),
    };
    for level in 0..levels {
        if fed[level] && returns[level] {
            result.position[level] = Some(result.kept.len());
            result.kept.push(level);
        } else {
            result.dropped.push(Dropped {
                level,
                trap: fed[level],
            });
        }
    }
    result
}

fn reached(edges: &[Vec<usize>]) -> Vec<bool> {
    let mut seen = vec![false; edges.len()];
    let mut open = Vec::new();
    if let Some(ground) = seen.first_mut() {
        *ground = true;
        open.push(0);
    }
    while let Some(level) = open.pop() {
        for &next in &edges[level] {
            if !seen[next] {
                seen[next] = true;
                open.push(next);
            }
        }
    }
    seen
}

/// Row-major rates between the kept levels.
pub(super) fn matrix(system: &LevelSystem, rates: &[Rates], connected: &Connected) -> Vec<f64> {
    let n = connected.kept.len();
    let mut matrix = vec![0.0; n * n];
    for (line, rate) in system.lines().iter().zip(rates) {
        let ends = (
            connected.position[line.lower],
            connected.position[line.upper],
        );
        if let (Some(lower), Some(upper)) = ends {
            matrix[lower * n + upper] += rate.up_per_s;
            matrix[upper * n + lower] += rate.down_per_s;
        }
    }
    matrix
}
