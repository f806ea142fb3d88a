//! Chance that is the same on every processor: xoshiro256++ (Blackman and Vigna 2019), its
//! state filled by splitmix64 (Steele, Lea and Flood 2014) from a seed and the number of a
//! stream, so that one more draw in one place does not change any other place.

/// splitmix64: turns one number into a row of well-mixed ones.
struct SplitMix(u64);

impl SplitMix {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }
}

/// One stream of chance.
#[derive(Clone, Debug)]
pub(super) struct Rng {
    state: [u64; 4],
}

impl Rng {
    /// The stream of that number for a seed. Two streams of one seed do not know each other.
    pub(super) fn stream(seed: u64, stream: u64) -> Self {
        let mut mix = SplitMix(seed ^ SplitMix(stream).next());
        Self { state: [mix.next(), mix.next(), mix.next(), mix.next()] }
    }

    fn next(&mut self) -> u64 {
        let [a, b, c, d] = self.state;
        let result = a.wrapping_add(d).rotate_left(23).wrapping_add(a);
        let (c, d) = (c ^ a, d ^ b);
        self.state = [a ^ d, b ^ c, c ^ (b << 17), d.rotate_left(45)];
        result
    }

    /// Even between 0 (may come) and 1 (never comes).
    pub(super) fn uniform(&mut self) -> f64 {
        (self.next() >> 11) as f64 * (1.0 / 9_007_199_254_740_992.0)
    }

    /// Even between two numbers.
    pub(super) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.uniform()
    }

    /// A whole number from 0 to `count - 1`; 0 where `count` is 0.
    pub(super) fn below(&mut self, count: usize) -> usize {
        (self.uniform() * count as f64) as usize
    }

    /// Standard normal, by Box and Muller (1958).
    pub(super) fn normal(&mut self) -> f64 {
        let radius = (-2.0 * libm::log(1.0 - self.uniform())).sqrt();
        radius * libm::cos(std::f64::consts::TAU * self.uniform())
    }

    /// Nearly standard normal, of mean 0 and variance 1 but never beyond 3.5: the sum of four
    /// even numbers. A meter's noise is drawn millions of times, and a logarithm each would
    /// cost more than the plant.
    pub(super) fn meter_noise(&mut self) -> f64 {
        let bits = self.next();
        let sum =
            (bits & 0xffff) + ((bits >> 16) & 0xffff) + ((bits >> 32) & 0xffff) + (bits >> 48);
        // Mean 4 x 65535/2, variance 4 x (65536^2 - 1)/12.
        (sum as f64 - 131_070.0) * (1.0 / 37_837.227_237_446_12)
    }
}

/// What wanders from day to day: `exp` of a first-order autoregression, of mean 1.
#[derive(Clone, Debug)]
pub(super) struct Wander {
    rng: Rng,
    /// Standard deviation of the logarithm.
    log_sd: f64,
    log: f64,
    day: i64,
}

/// Correlation of one day's rate with the next day's.
const DAILY_CORRELATION: f64 = 0.85;

impl Wander {
    /// `sd` is the standard deviation of the factor itself, 0 for one that stays at 1.
    pub(super) fn new(mut rng: Rng, sd: f64) -> Self {
        let log_sd = libm::log(1.0 + sd * sd).sqrt();
        let log = log_sd * rng.normal();
        Self { rng, log_sd, log, day: 0 }
    }

    /// The factor of a day counted from the start; days may be asked in rising order only.
    pub(super) fn factor(&mut self, day: i64) -> f64 {
        let fresh = (1.0 - DAILY_CORRELATION * DAILY_CORRELATION).sqrt();
        while self.day < day {
            self.day += 1;
            self.log = DAILY_CORRELATION * self.log + fresh * self.log_sd * self.rng.normal();
        }
        libm::exp(self.log - 0.5 * self.log_sd * self.log_sd)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_generators_give_their_published_first_numbers() {
        // splitmix64: the numbers circulated with its public-domain source for seed 1234567.
        let mut mix = SplitMix(1_234_567);
        let first = [mix.next(), mix.next(), mix.next()];
        assert_eq!(
            first,
            [6_457_827_717_110_365_317, 3_203_168_211_198_807_973, 9_817_491_932_198_370_423]
        );
        // xoshiro256++: the numbers for state 1, 2, 3, 4 in the tests of the crate rand_xoshiro.
        let mut rng = Rng { state: [1, 2, 3, 4] };
        let first = [rng.next(), rng.next(), rng.next(), rng.next(), rng.next()];
        assert_eq!(
            first,
            [
                41_943_041,
                58_720_359,
                3_588_806_011_781_223,
                3_591_011_842_654_386,
                9_228_616_714_210_784_205
            ]
        );
    }

    #[test]
    fn noise_has_mean_nought_and_variance_one() {
        let mut rng = Rng::stream(7, 1);
        for draw in [Rng::normal, Rng::meter_noise] {
            let values: Vec<f64> = (0..200_000).map(|_| draw(&mut rng)).collect();
            let mean = values.iter().sum::<f64>() / values.len() as f64;
            let variance = values.iter().map(|v| v * v).sum::<f64>() / values.len() as f64;
            assert!(mean.abs() < 0.01, "{mean}");
            assert!((variance - 1.0).abs() < 0.015, "{variance}");
        }
    }

    #[test]
    fn wander_has_the_mean_spread_and_memory_it_was_given() {
        let mut wander = Wander::new(Rng::stream(3, 2), 0.3);
        let values: Vec<f64> = (0..60_000).map(|day| wander.factor(day)).collect();
        let mean = values.iter().sum::<f64>() / values.len() as f64;
        let about = |lag: usize| {
            values.iter().zip(&values[lag..]).map(|(a, b)| (a - mean) * (b - mean)).sum::<f64>()
                / (values.len() - lag) as f64
        };
        assert!((mean - 1.0).abs() < 0.02, "{mean}");
        assert!((about(0).sqrt() - 0.3).abs() < 0.02);
        assert!((about(1) / about(0) - DAILY_CORRELATION).abs() < 0.02);
        assert_eq!(Wander::new(Rng::stream(3, 2), 0.0).factor(9), 1.0);
    }
}
