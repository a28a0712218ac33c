//! Everything drawn, from one seed.
//!
//! A [`Draw`] is a generator named by the path of what it draws for (`"P-1/drive-end/path"`). Its sequence depends on
//! the scenario's seed and that name alone, so adding an asset, or a fault behind the others, changes nothing that was
//! drawn for another.
//! Generator: xoshiro256++, whose sequence is fixed by its definition.

use rand_distr::{Distribution, Exp1, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::{Rng, SeedableRng};

/// A named stream of random numbers.
#[derive(Clone, Debug)]
pub struct Draw {
    seed: u64,
    name: u64,
    generator: Xoshiro256PlusPlus,
}

/// FNV-1a, 64 bit: names to numbers, the same on every machine.
fn name_hash(start: u64, name: &str) -> u64 {
    name.bytes().fold(start, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
    })
}

impl Draw {
    /// The root of a scenario's draws.
    #[must_use]
    pub fn new(seed: u64) -> Draw {
        Draw::named(seed, 0xcbf2_9ce4_8422_2325)
    }

    fn named(seed: u64, name: u64) -> Draw {
        Draw {
            seed,
            name,
            generator: Xoshiro256PlusPlus::seed_from_u64(seed.rotate_left(32) ^ name),
        }
    }

    /// The stream of a part, independent of how much was drawn here.
    #[must_use]
    pub fn part(&self, name: &str) -> Draw {
        Draw::named(self.seed, name_hash(name_hash(self.name, "/"), name))
    }

    /// Uniform in `[0, 1)`.
    pub fn unit(&mut self) -> f64 {
        (self.generator.next_u64() >> 11) as f64 * (1.0 / (1_u64 << 53) as f64)
    }

    /// Uniform in `[low, high)`.
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }

    /// Log-uniform in `[low, high)`; both positive.
    pub fn log_between(&mut self, low: f64, high: f64) -> f64 {
        low * (high / low).powf(self.unit())
    }

    /// A factor within ±`db` (amplitude: 20 lg), uniform in dB.
    pub fn gain_db(&mut self, db: f64) -> f64 {
        10_f64.powf(self.between(-db, db) / 20.0)
    }

    /// An angle in `[0, 2 pi)`, rad.
    pub fn angle(&mut self) -> f64 {
        self.between(0.0, core::f64::consts::TAU)
    }

    /// Normal with mean 0 and standard deviation 1.
    pub fn normal(&mut self) -> f64 {
        StandardNormal.sample(&mut self.generator)
    }

    /// Exponential with mean 1.
    pub fn exponential(&mut self) -> f64 {
        Exp1.sample(&mut self.generator)
    }

    /// Whether something of this probability happens.
    pub fn happens(&mut self, probability: f64) -> bool {
        self.unit() < probability
    }
}

#[cfg(test)]
mod tests {
    use super::Draw;

    #[test]
    fn a_part_draws_the_same_however_much_was_drawn_beside_it() {
        let root = Draw::new(7);
        let mut used = root.clone();
        for _ in 0..100 {
            used.unit();
        }
        let first: Vec<f64> = (0..5)
            .map({
                let mut part = root.part("pump");
                move |_| part.unit()
            })
            .collect();
        let again: Vec<f64> = (0..5)
            .map({
                let mut part = used.part("pump");
                move |_| part.unit()
            })
            .collect();
        assert_eq!(first, again);
        assert_ne!(root.part("pump").unit(), root.part("motor").unit());
        assert_ne!(root.part("pump").unit(), Draw::new(8).part("pump").unit());
    }

    /// Mean and spread within four standard errors of the distribution's own (mean 0, variance 1; mean 1).
    #[test]
    fn normal_and_exponential_draws_have_the_moments_of_their_definition() {
        let mut draw = Draw::new(11);
        let n = 100_000;
        let normal: Vec<f64> = (0..n).map(|_| draw.normal()).collect();
        let mean = normal.iter().sum::<f64>() / f64::from(n);
        let square = normal.iter().map(|x| x * x).sum::<f64>() / f64::from(n);
        let fourth = normal.iter().map(|x| x.powi(4)).sum::<f64>() / f64::from(n);
        assert!(mean.abs() < 4.0 / f64::from(n).sqrt(), "{mean}");
        assert!(
            (square - 1.0).abs() < 4.0 * (2.0 / f64::from(n)).sqrt(),
            "{square}"
        );
        assert!(
            (fourth - 3.0).abs() < 4.0 * (96.0 / f64::from(n)).sqrt(),
            "{fourth}"
        );
        let waits = (0..n).map(|_| draw.exponential()).sum::<f64>() / f64::from(n);
        assert!((waits - 1.0).abs() < 4.0 / f64::from(n).sqrt(), "{waits}");
    }
}
