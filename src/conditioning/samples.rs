//! The last `N` numbers, and what the windows and the noise detector compute of them.
//!
//! A ring over `heapless::Vec`: writing to `heapless::HistoryBuf` 0.9.4 checks a bound that the optimiser does not see
//! through, and a firmware would link the panic that belongs to it.

use heapless::Vec;

/// The last `N` finite numbers, in no particular order.
#[derive(Debug, Clone)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(crate) struct Samples<const N: usize> {
    values: Vec<f32, N>,
    /// Where the oldest one stands when all `N` are there.
    oldest: usize,
}

impl<const N: usize> Samples<N> {
    /// None yet; room for none, or for more than 1023, does not compile.
    pub const fn new() -> Self {
        const { assert!(N > 0 && N < 1024, "a window holds 1 to 1023 samples") };
        Self { values: Vec::new(), oldest: 0 }
    }

    /// Takes a number in the place of the oldest; says whether it did: one that is not finite is left out.
    pub fn push(&mut self, value: f32) -> bool {
        if !value.is_finite() {
            return false;
        }
        if self.values.push(value).is_err() {
            if let Some(slot) = self.values.get_mut(self.oldest) {
                *slot = value;
            }
            self.oldest = self.oldest.saturating_add(1);
            if self.oldest >= N {
                self.oldest = 0;
            }
        }
        true
    }

    pub fn as_slice(&self) -> &[f32] {
        &self.values
    }

    pub fn is_full(&self) -> bool {
        self.values.is_full()
    }

    pub fn clear(&mut self) {
        self.values.clear();
        self.oldest = 0;
    }

    /// The mean; nothing without samples, or where their sum exceeds the number range.
    pub fn mean(&self) -> Option<f32> {
        let mean = self.values.iter().sum::<f32>() / self.values.len() as f32;
        Some(mean).filter(|mean| mean.is_finite())
    }

    /// Mean square about the mean, over `n - 1`; nothing below two samples, or beyond the number range.
    pub fn variance(&self) -> Option<f32> {
        let mean = self.mean()?;
        let squares: f32 = self.values.iter().map(|value| (value - mean) * (value - mean)).sum();
        let others = self.values.len().checked_sub(1).filter(|others| *others > 0)?;
        Some(squares / others as f32).filter(|variance| variance.is_finite())
    }
}
