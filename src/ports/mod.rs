//! The structure seen only from its ports: a small admittance matrix and the currents each port excites.
//!
//! Takes an [`Interaction`] at one frequency; gives a [`PortModel`]. Every lumped part lives outside the interaction matrix, in series
//! with a port, so changing a choke never refills or refactors anything.

use crate::interaction::{Factored, Interaction, SingularMatrix, Surroundings};
use crate::mesh::Mesh;
use faer::Mat;
use nalgebra::{DMatrix, DVector};
use num_complex::Complex64;

/// Ports and the currents they excite, at one frequency.
#[derive(Debug, Clone)]
pub struct PortModel {
    /// Short-circuit admittance matrix, siemens; shape (ports, ports), symmetric. Row = current, column = voltage.
    pub admittance_s: DMatrix<Complex64>,
    /// Unknown currents for 1 V at each port, others shorted, A; shape (unknowns, ports).
    pub currents_a: Mat<Complex64>,
}

impl PortModel {
    /// Fill, factor and solve for every port of the mesh.
    ///
    /// # Errors
    /// [`SingularMatrix`] when the matrix cannot be factored.
    pub fn solve(interaction: &Interaction, earth: &Surroundings) -> Result<Self, SingularMatrix> {
        let factored = Factored::new(interaction.fill(earth))?;
        Self::from_factored(interaction.mesh(), &factored)
    }

    /// Solve a factored matrix for every port of the mesh.
    ///
    /// # Errors
    /// [`SingularMatrix`] when the solution is not finite.
    pub fn from_factored(mesh: &Mesh, factored: &Factored) -> Result<Self, SingularMatrix> {
        let excite = excitations(mesh);
        let mut currents_a = excite.clone();
        factored.solve_in_place(&mut currents_a);
        let ports = mesh.ports.len();
        let admittance_s = DMatrix::from_fn(ports, ports, |i, j| {
            (0..mesh.unknowns).map(|k| excite[(k, i)] * currents_a[(k, j)]).sum()
        });
        if admittance_s.iter().all(|y: &Complex64| y.is_finite()) {
            Ok(Self { admittance_s, currents_a })
        } else {
            Err(SingularMatrix { unknowns: mesh.unknowns })
        }
    }

    /// Port currents with 1 V on the feed (port 0) and an impedance in series with every other port, A; entry 0 is the feed current.
    ///
    /// With voltages V = (1, −Z_k I_k): I = Y V, so (1 + Y_kk' Z_k') I_k = Y_k0. `impedances_ohm` has one entry for each port after the feed.
    #[must_use]
    pub fn loaded_currents(&self, impedances_ohm: &[Complex64]) -> DVector<Complex64> {
        let ports = self.admittance_s.nrows();
        let y = &self.admittance_s;
        let used: Vec<usize> =
            (1..ports).filter(|&k| impedances_ohm.get(k - 1).is_some_and(|z| *z != Complex64::ZERO)).collect();
        if used.is_empty() {
            return y.column(0).into_owned();
        }
        let matrix = DMatrix::from_fn(used.len(), used.len(), |i, j| {
            let unit = if i == j { Complex64::ONE } else { Complex64::ZERO };
            unit + y[(used[i], used[j])] * impedances_ohm[used[j] - 1]
        });
        let right = DVector::from_fn(used.len(), |i, _| y[(used[i], 0)]);
        let solved = matrix.lu().solve(&right).unwrap_or_else(|| DVector::zeros(used.len()));
        DVector::from_fn(ports, |k, _| {
            y[(k, 0)]
                - used
                    .iter()
                    .enumerate()
                    .map(|(i, &j)| y[(k, j)] * impedances_ohm[j - 1] * solved[i])
                    .sum::<Complex64>()
        })
    }

    /// Unknown currents with 1 V on the feed and the parts in place, A, from [`PortModel::loaded_currents`].
    #[must_use]
    pub fn unknowns(&self, impedances_ohm: &[Complex64], port_currents_a: &DVector<Complex64>) -> Vec<Complex64> {
        let ports = self.admittance_s.nrows();
        (0..self.currents_a.nrows())
            .map(|row| {
                let mut sum = self.currents_a[(row, 0)];
                for k in 1..ports {
                    let z = impedances_ohm.get(k - 1).copied().unwrap_or(Complex64::ZERO);
                    sum -= self.currents_a[(row, k)] * z * port_currents_a[k];
                }
                sum
            })
            .collect()
    }
}

/// Port vectors: how much of each unknown flows through each port; shape (unknowns, ports).
#[must_use]
pub fn excitations(mesh: &Mesh) -> Mat<Complex64> {
    let mut out = Mat::zeros(mesh.unknowns, mesh.ports.len());
    for (column, port) in mesh.ports.iter().enumerate() {
        for &(k, weight) in &port.elements {
            for (unknown, factors) in mesh.elements[k].legendre_map() {
                out[(unknown, column)] += Complex64::from(weight * factors[0]);
            }
        }
    }
    out
}
