//! Windows: median, mean and scatter of the last samples.

use super::linear::Linear;
use super::samples::Samples;
use core::marker::PhantomData;

/// The last `N` samples.
///
/// The median throws out single wrong samples, the mean takes noise down by the root of `N`. Both need each sample
/// linearised, see [the module](super).
///
/// ```
/// use evenbore::{conditioning::Window, quantity::MassFlow};
/// let mut window = Window::<MassFlow, 5>::new();
/// for grams in [1.0, 1.2, 99.0, 1.1, f32::NAN, 0.9] {
///     window.push(MassFlow::from_grams_per_second(grams));
/// }
/// let median = window.median().ok_or("no samples")?;
/// assert!((median.as_grams_per_second() - 1.1).abs() < 1e-6);
/// # Ok::<(), &str>(())
/// ```
#[derive(Debug, Clone)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Window<Q, const N: usize> {
    samples: Samples<N>,
    quantity: PhantomData<Q>,
}

impl<Q: Linear, const N: usize> Window<Q, N> {
    /// An empty window; a window without room does not compile.
    pub const fn new() -> Self {
        Self { samples: Samples::new(), quantity: PhantomData }
    }

    /// Takes a sample in the place of the oldest; says whether it did: one that is not finite is left out.
    pub fn push(&mut self, sample: Q) -> bool {
        self.samples.push(sample.as_si())
    }

    /// How many samples there are.
    pub fn len(&self) -> usize {
        self.samples.as_slice().len()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.samples.as_slice().is_empty()
    }

    /// Forgets all samples.
    pub fn clear(&mut self) {
        self.samples.clear();
    }

    /// The middle sample, of an even number the lower of the two in the middle; nothing without samples.
    ///
    /// Found by counting, `N^2` comparisons, so that nothing is moved or copied.
    pub fn median(&self) -> Option<Q> {
        let samples = self.samples.as_slice();
        let middle = samples.len().saturating_sub(1) / 2;
        let is_middle = |&&candidate: &&f32| {
            let below = samples.iter().filter(|&&other| other < candidate).count();
            let up_to = samples.iter().filter(|&&other| other <= candidate).count();
            below <= middle && middle < up_to
        };
        samples.iter().find(is_middle).map(|&value| Q::from_si(value))
    }

    /// The mean; nothing without samples, or where their sum exceeds the number range.
    pub fn mean(&self) -> Option<Q> {
        self.samples.mean().map(Q::from_si)
    }

    /// Mean square of the samples about their mean, over `n - 1`, in SI units squared; nothing below two samples.
    pub fn variance(&self) -> Option<f32> {
        self.samples.variance()
    }
}

impl<Q: Linear, const N: usize> Default for Window<Q, N> {
    fn default() -> Self {
        Self::new()
    }
}
