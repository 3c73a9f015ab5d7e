//! The potentials of a current element over, in and across a lossy half space, and what follows from them.
//!
//! Takes frequency, permittivity, conductivity and distances; gives potentials (directly or from tables), fields,
//! ground wave and the power that passes down through the surface. Depends on [`crate::quantity`] alone.
//!
//! Source: K. A. Michalski and D. Zheng, IEEE Trans. Antennas Propagat. 38(3), 1990, formulation C, re-derived here
//! for one interface with the transmission-line analogue (K. A. Michalski and J. R. Mosig, IEEE Trans. Antennas
//! Propagat. 45(3), 1997). Time factor e^{+jωt}; z points up; air above z = 0, soil below.
//!
//! With u_i = √(λ² − k_i²), Re u_i ≥ 0, n² = ε_r − jσ/(ωε₀), k₁ = n k₀, a field point at z, a source at z' and
//! E(z) = e^{−u₀z} above or e^{−u₁|z|} below, three integrals carry everything:
//!
//! - H = ∫ 2/(u₀+u₁) · E(z)E(z') J₀(λρ) λ dλ
//! - Q = ∫ 2/(n²u₀+u₁) · E(z)E(z') J₀(λρ) λ dλ
//! - P = ∫ 2(n²−1)/((u₀+u₁)(n²u₀+u₁)) · E(z)E(z') J₀(λρ) λ dλ
//!
//! and with g = e^{−jkR}/R of the medium, R the distance and R' that to the mirror point,
//!
//! | | both above | both below | across |
//! |---|---|---|---|
//! | K_xx | g₀(R) − g₀(R') + H | g₁(R) − g₁(R') + H | H |
//! | K_Φ | g₀(R) − g₀(R') + Q | \[g₁(R) − g₁(R')\]/n² + Q | Q |
//! | K_zz | K_xx + (n²−1) Q | K_xx − (n²−1) Q | H |
//!
//! K_zx = ∂P/∂x (z component of A from an x current), K_xz = −∂P/∂x, the same for y. Then
//!
//! E = −jω (μ₀/4π) K·J − ∇Φ, Φ = (1/4πε₀) K_Φ ρ_charge, H = (1/4π) ∇ × (K·J).
//!
//! K_xx, K_Φ and P are continuous across the surface; K_zz steps by (n²−1)Q there, as E_z must.
//!
//! | I want to | start in | prove in |
//! |---|---|---|
//! | change a spectral function or its static part | `spectrum`, `potentials` | `tests/published/halfspace.rs` |
//! | change the path of integration | `rule`, `panels` | the same |
//! | make tables smaller or faster | `shells` (what is sampled), `spectral_sum` (how), `leaves` (what is kept) | tests in `side_table` |
//! | work on pairs across the surface | `across_table`, `across_leaves` | tests there |
//! | change fields of an element, the ground wave | `dipole`, `ground_wave` | tests there and published ones |
//! | change the earth loss | `loss`, `loss_table` | tests there: input = sky + ground |

mod across_leaves;
mod across_table;
mod bessel;
mod bessel_fast;
mod chebyshev;
mod dipole;
mod ground_wave;
mod leaves;
mod loss;
mod loss_table;
mod panels;
mod patch;
mod potentials;
mod rule;
mod shells;
mod side_table;
mod soil;
mod spectral_sum;
mod spectrum;
mod tensor;

pub use across_table::{AcrossDistances, AcrossTable};
pub use dipole::DipoleField;
pub use loss::LossKernels;
pub use loss_table::LossTable;
pub use potentials::{ImageCoefficients, Potentials};
pub use shells::Distances;
pub use side_table::SideTable;
pub use soil::{HalfSpace, HalfSpaceError, Region};
