//! Power that the near field of the currents sends down into the soil.
//!
//! The quadratic form of [`crate::halfspace::LossKernels`] over all pairs above the surface; the share of the plane waves is
//! [`crate::field::FarField::downward_w`].

use super::fill::{Interaction, Legendre, derive};
use super::kernel::pair_moments;
use super::quadrature::{gauss, legendre};
use super::rest::points;
use super::surroundings::{SoilRest, Surroundings};
use crate::halfspace::{HalfSpace, LossTable};
use crate::mesh::{Element, MAX_DEGREE};
use crate::quantity::{EPSILON_0_F_PER_M, ETA_0_OHM, MU_0_H_PER_M};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Current and charge at the quadrature points of an element.
struct Points {
    /// Height and horizontal place.
    at: Vec<crate::layout::Point>,
    /// Weight times current, A m.
    current: Vec<Complex64>,
    /// Weight times charge per length, C.
    charge: Vec<Complex64>,
}

impl Interaction {
    /// Power below the near field of currents above soil, W, for peak phasors; `None` where the earth is no soil or a conductor lies
    /// below its surface.
    ///
    /// P = ½ω Re ∬ { (μ0/4π)(across J_t*·J_t' + up J_z* J_z') + charge q*q'/(4πε0) − (η0/2π) up_charge Im(J_z q'*) }
    /// over all pairs of points; the image part of `charge` goes through the static moments of the mirrored pairs.
    #[must_use]
    pub fn near_field_loss_w(&self, earth: &Surroundings, currents: &[Legendre]) -> Option<f64> {
        let soil = earth.soil()?;
        let (table, image) = (soil.loss_table()?, self.image.as_ref()?);
        if self.mesh.elements.iter().any(|e| e.below) {
            return None;
        }
        let omega = earth.air().angular;
        let charges: Vec<Legendre> = currents
            .iter()
            .zip(&self.mesh.elements)
            .map(|(c, e)| derive(*c).map(|x| x * Complex64::new(0.0, 2.0 / (e.length_m * omega))))
            .collect();
        let mut total = 0.0;
        for pair in &image[0].list {
            let (i, j) = (pair.one, pair.two);
            let (e, f) = (&self.mesh.elements[i], &self.mesh.elements[j]);
            let twice = if i == j { 1.0 } else { 2.0 };
            total += twice * soil.space().loss_image() / (4.0 * PI * EPSILON_0_F_PER_M)
                * self.image_sum(pair, (&charges[i], &charges[j]));
            total += rest_sum((e, &currents[i], &charges[i]), (f, &currents[j], &charges[j]), i == j, (soil, &table));
        }
        Some(0.5 * omega * total)
    }

    /// Re ∬ q* q'/R' over a mirrored pair.
    fn image_sum(&self, pair: &super::pairs::Pair, (q, p): (&Legendre, &Legendre)) -> f64 {
        let (Some(image), Some(nodes)) = (&self.image, &self.image_nodes) else { return 0.0 };
        let (e, f) = (&self.mesh.elements[pair.one], &self.mesh.elements[pair.two]);
        let mean = match pair.near {
            Some(index) => {
                let area = e.length_m * f.length_m;
                image[0].statics[index as usize].inverse.map(|row| row.map(|x| x / area))
            }
            None => pair_moments(&self.points(pair, nodes), 0.0, 0.0).re,
        };
        let mut sum = 0.0;
        for a in 0..=MAX_DEGREE {
            for b in 0..=MAX_DEGREE {
                sum += mean[a][b] * (q[a].conj() * p[b]).re;
            }
        }
        sum * e.length_m * f.length_m
    }
}

/// The smooth kernels over a pair by a product rule, both orders of the pair included.
fn rest_sum(
    (e, i_e, q_e): (&Element, &Legendre, &Legendre),
    (f, i_f, q_f): (&Element, &Legendre, &Legendre),
    same: bool,
    (soil, table): (&SoilRest, &LossTable),
) -> f64 {
    let gap = super::line::clearance(&super::line::Line::of(e), &super::line::Line::mirrored(f));
    let one = sample(e, i_e, q_e, points(e, gap, soil, false));
    let two = sample(f, i_f, q_f, points(f, gap, soil, false));
    let (t, u) = (e.tangent, f.tangent);
    let level = t.x * u.x + t.y * u.y;
    let both = if same { 1.0 } else { 2.0 };
    let mut sum = 0.0;
    for ((p, i), q) in one.at.iter().zip(&one.current).zip(&one.charge) {
        for ((r, j), s) in two.at.iter().zip(&two.current).zip(&two.charge) {
            let k = table.remainder((p - r).xy().norm(), p.z + r.z);
            let currents = (i.conj() * j).re * (k.across * level + k.up * t.z * u.z);
            let charges = (q.conj() * s).re * k.charge;
            let crossed = if same { (i * t.z * s.conj()).im } else { (i * t.z * s.conj() + j * u.z * q.conj()).im };
            sum += both * (MU_0_H_PER_M / (4.0 * PI) * currents + charges / (4.0 * PI * EPSILON_0_F_PER_M))
                - ETA_0_OHM / (2.0 * PI) * k.up_charge * crossed;
        }
    }
    sum
}

fn sample(e: &Element, current: &Legendre, charge: &Legendre, n: usize) -> Points {
    let rule = gauss(n);
    let series = |c: &Legendre, x: f64| -> Complex64 { c.iter().zip(legendre(x)).map(|(c, p)| c * p).sum() };
    let weighted = |c: &Legendre| -> Vec<Complex64> {
        let at = |(x, w): (&f64, &f64)| series(c, *x) * (0.5 * w * e.length_m);
        rule.nodes.iter().zip(&rule.weights).map(at).collect()
    };
    Points { at: rule.nodes.iter().map(|x| e.at(*x)).collect(), current: weighted(current), charge: weighted(charge) }
}

impl SoilRest {
    /// The half-space itself.
    pub(super) fn space(&self) -> &HalfSpace {
        &self.space
    }

    /// Table of the loss kernels over the distances above the surface.
    fn loss_table(&self) -> Option<LossTable> {
        self.above.as_ref().map(|table| LossTable::build(&self.space, table.distances(), table.tolerance()))
    }
}
