//! Instruction sets: the same safe loop compiled for each, chosen once per run.
#![cfg_attr(
    target_arch = "x86_64",
    expect(
        unsafe_code,
        reason = "a Level exists only after its features were detected"
    )
)]

/// An instruction set that this machine has. Results do not depend on it by a bit.
///
/// # Examples
///
/// ```
/// let levels = albedra::Level::available();
/// assert!(!levels.is_empty());
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Level(Set);

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Set {
    Base,
    #[cfg(target_arch = "x86_64")]
    Avx2,
    #[cfg(target_arch = "x86_64")]
    Avx512,
}

/// A loop over lanes that is compiled once for each level. Implementations of `run` are `#[inline(always)]`; a closure
/// would not be inlined into the function that has the features and would stay at the baseline.
pub(crate) trait Stage {
    type Output;
    fn run(self) -> Self::Output;
}

impl Level {
    /// The levels of this machine, slowest first.
    pub fn available() -> Vec<Self> {
        #[cfg(target_arch = "x86_64")]
        if is_x86_feature_detected!("avx2") {
            let mut levels = vec![Self(Set::Base), Self(Set::Avx2)];
            if is_x86_feature_detected!("avx512f")
                && is_x86_feature_detected!("avx512dq")
                && is_x86_feature_detected!("avx512vl")
            {
                levels.push(Self(Set::Avx512));
            }
            return levels;
        }
        vec![Self(Set::Base)]
    }

    /// The fastest level of this machine.
    pub fn best() -> Self {
        Self::available().last().copied().unwrap_or(Self(Set::Base))
    }

    /// Runs a stage compiled for this level.
    #[inline]
    pub(crate) fn run<S: Stage>(self, stage: S) -> S::Output {
        match self.0 {
            Set::Base => stage.run(),
            // SAFETY: the field is private and holds `Avx2` only where `available` has detected it.
            #[cfg(target_arch = "x86_64")]
            Set::Avx2 => unsafe { avx2(stage) },
            // SAFETY: as above, for all three features.
            #[cfg(target_arch = "x86_64")]
            Set::Avx512 => unsafe { avx512(stage) },
        }
    }
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2")]
fn avx2<S: Stage>(stage: S) -> S::Output {
    stage.run()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,avx512f,avx512dq,avx512vl")]
fn avx512<S: Stage>(stage: S) -> S::Output {
    stage.run()
}
