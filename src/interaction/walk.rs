//! One walk over all pairs of elements with everything the earth does to each.

use super::block::PairBlocks;
use super::fill::Interaction;
use super::group::{FarPair, Groups};
use super::kernel::{PointPair, pair_block};
use super::pairs::{Nodes, Pair, Pairs};
use super::rest;
use super::surroundings::{Family, SoilRest, Surroundings};
use crate::halfspace::Region;
use crate::processor::{Vectorised, widest};

/// What is done with the kernels of pairs. Implementations mark both functions `#[inline(always)]` (see [`Vectorised`]).
pub(super) trait Visit {
    /// A pair of elements (i ≤ j); it may come in several parts.
    fn pair<const FMA: bool>(&mut self, i: usize, j: usize, blocks: &PairBlocks);

    /// What the soil adds between all elements of two groups.
    fn far<const FMA: bool>(&mut self, groups: &Groups, pair: &FarPair);
}

/// One after the other.
impl<V: Visit, W: Visit> Visit for (V, W) {
    #[inline(always)]
    fn pair<const FMA: bool>(&mut self, i: usize, j: usize, blocks: &PairBlocks) {
        self.0.pair::<FMA>(i, j, blocks);
        self.1.pair::<FMA>(i, j, blocks);
    }

    #[inline(always)]
    fn far<const FMA: bool>(&mut self, groups: &Groups, pair: &FarPair) {
        self.0.far::<FMA>(groups, pair);
        self.1.far::<FMA>(groups, pair);
    }
}

impl Interaction {
    /// Quadrature points of a pair; of a near one only the rest beyond its static moments is wanted.
    #[inline(always)]
    pub(super) fn points<'a>(&'a self, pair: &Pair, sources: &'a Nodes) -> PointPair<'a> {
        let (n, m) = (usize::from(pair.points.0), usize::from(pair.points.1));
        PointPair {
            observers: &self.nodes.at[pair.one][n],
            sources: &sources.at[pair.two][m],
            left: &self.nodes.weighted[n],
            right: &self.nodes.weighted[m],
            offset_m2: pair.offset_m2,
            rest_only: pair.near.is_some(),
        }
    }

    /// Hand every pair with its kernels, all images included, to a visitor.
    pub(super) fn walk(&self, earth: &Surroundings, visit: &mut impl Visit) {
        self.walk_some(earth, None, visit);
    }

    /// The same for the pairs with a wanted element.
    pub(super) fn walk_some(&self, earth: &Surroundings, wanted: Option<&[bool]>, visit: &mut impl Visit) {
        let soil = earth.soil();
        let groups = soil.map(|soil| Groups::of(&self.mesh.elements, self.split, soil));
        let soil = soil.zip(groups.as_ref());
        let families = earth.families();
        widest(Work { interaction: self, families: &families, soil, wanted, visit });
        for sleeve in &self.sleeves {
            if wanted.is_none_or(|w| w[sleeve.one] || w[sleeve.two]) {
                let blocks = sleeve.blocks(earth.permittivity(self.mesh.elements[sleeve.one].below));
                visit.pair::<false>(sleeve.one, sleeve.two, &blocks);
            }
        }
    }
}

/// The walk as work for the processor.
struct Work<'a, V> {
    interaction: &'a Interaction,
    families: &'a [Family],
    soil: Option<(&'a SoilRest, &'a Groups)>,
    wanted: Option<&'a [bool]>,
    visit: &'a mut V,
}

impl<V: Visit> Vectorised for Work<'_, V> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        let elements = &self.interaction.mesh.elements;
        for region in [Region::Above, Region::Below, Region::Across] {
            let direct = &self.interaction.direct[region as usize];
            let mut parts: Vec<(&Pairs, &Nodes, &Family)> = Vec::with_capacity(2);
            for family in self.families.iter().filter(|f| f.region == region) {
                match (family.mirrored, &self.interaction.image, &self.interaction.image_nodes) {
                    (false, ..) => parts.push((direct, &self.interaction.nodes, family)),
                    (true, Some(image), Some(nodes)) => parts.push((&image[region as usize], nodes, family)),
                    (true, ..) => debug_assert!(false, "an earth with images needs an interaction prepared with them"),
                }
            }
            if parts.is_empty() {
                continue;
            }
            for (n, pair) in direct.list.iter().enumerate() {
                let (i, j) = (pair.one, pair.two);
                if self.wanted.is_some_and(|w| !w[i] && !w[j]) {
                    continue;
                }
                let mut blocks = PairBlocks::ZERO;
                for (pairs, sources, family) in &parts {
                    add_family::<FMA>(self.interaction, (pairs, &pairs.list[n]), sources, family, &mut blocks);
                }
                match self.soil {
                    Some((soil, groups)) if !groups.are_far(i, j) => {
                        rest::add::<FMA>(&elements[i], &elements[j], soil, region, &mut blocks);
                    }
                    _ => {}
                }
                self.visit.pair::<FMA>(i, j, &blocks);
            }
        }
        let Some((soil, groups)) = self.soil else { return };
        for (one, two, nodes) in groups.far() {
            // with a split, the elements behind it are not paired among themselves
            let is_paired = groups.list[one].members.start < self.interaction.split;
            let any = |group: usize| groups.list[group].members.clone().any(|k| self.wanted.is_none_or(|w| w[k]));
            if is_paired && (any(one) || any(two)) {
                self.visit.far::<FMA>(groups, &groups.pair::<FMA>((one, two), nodes, soil));
            }
        }
    }
}

/// What one family of source lines adds to a pair.
#[inline(always)]
fn add_family<const FMA: bool>(
    interaction: &Interaction,
    (pairs, pair): (&Pairs, &Pair),
    sources: &Nodes,
    family: &Family,
    out: &mut PairBlocks,
) {
    let elements = &interaction.mesh.elements;
    let (e, f) = (&elements[pair.one], &elements[pair.two]);
    let points = interaction.points(pair, sources);
    let k = family.k;
    let mut block = pair_block::<FMA>(&points, k.re, -k.im);
    if let Some(index) = pair.near {
        let s = &pairs.statics[index as usize];
        let area = e.length_m * f.length_m;
        block.add_real::<FMA>((1.0 / area).into(), &s.inverse);
        block.add_real::<FMA>(-0.5 * k * k / area, &s.direct);
    }
    let (t, u) = (e.tangent, f.tangent);
    let weight = family.weight;
    let current = weight.horizontal * (t.x * u.x + t.y * u.y) + weight.vertical * (t.z * u.z);
    out.current.add::<FMA>(current, &block);
    out.potential.add::<FMA>(weight.potential, &block);
}
