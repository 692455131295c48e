/** One step after another through the posterior of counterModel.ts, where the model is described. */
import { absent, doubtful, unseen } from './alignment.ts'
import type { Random } from '../random.ts'
import type { Cell, CounterCells } from './counterCells.ts'
import type { CounterPriors } from './counterPriors.ts'
import { drawBeta, drawBinomial, drawGamma, drawPoisson } from './draws.ts'

/** Gauss-Hermite nodes and weights of the standard normal, five points: the classes of clarity (Abramowitz & Stegun 1964, 25.4.46). */
const clarityNodes = [-2.8569700138728056, -1.3556261799742659, 0, 1.3556261799742659, 2.8569700138728056]
const clarityWeights = [0.011257411327720689, 0.22207592200561266, 8 / 15, 0.22207592200561266, 0.011257411327720689]
const nodes = clarityNodes.length
/** Own guess for a step before it is tuned; log odds. */
const firstStep = 0.3
const tuneEvery = 25
/** Cells of so few sites are faster done site by site than by binomial numbers. */
const fewSites = 4

/** log(1 + e^x) where x is a log odds and so never huge. */
const softPlus = (x: number) => Math.log1p(Math.exp(x))
const logistic = (x: number) => 1 / (1 + Math.exp(-x))

/** A Metropolis step size that is tuned to accept about a third of its proposals. */
class StepSize {
  size = firstStep
  private tried = 0
  private taken = 0

  note(accepted: boolean): void {
    this.tried++
    if (accepted) this.taken++
  }

  tune(): void {
    if (this.tried === 0) return
    const share = this.taken / this.tried
    this.size *= share < 0.2 ? 0.6 : share > 0.5 ? 1.6 : 1
    this.tried = 0
    this.taken = 0
  }
}

/**
 * A stratum is a group, a spacing bin and a clarity node: index (group x bins + bin) x 5 + node. Tables over counters and
 * strata are [counters x strata], row-major.
 */
export class CounterSampler {
  beta = 0
  sigma = 0.3
  tau: number
  missedByAll = 0
  /** P(year) of the sites of each cell under the current parameters, [cells]. */
  readonly probability: Float64Array

  private readonly k: number
  private readonly strata: number
  private readonly qualities: number
  /** Log odds, at average clarity, of missing a year and of calling a marked one doubtful, [counters]. */
  private readonly missLogit: Float64Array
  private readonly doubtLogit: Float64Array
  /** gamma; 0 for clear stretches, [quality classes]. */
  private readonly gamma: Float64Array
  /** Chance of a false boundary a place, [counters x quality classes]; chance that it is called doubtful, [counters]. */
  private readonly falseRate: Float64Array
  private readonly falseDoubt: Float64Array
  /** Expected years, [groups x bins]; share of the places for false boundaries, [bins]. */
  private readonly intensity: Float64Array
  private readonly placeShare: Float64Array
  /** beta z + gamma + sigma u, [strata]. */
  private hardness: Float64Array
  /** Years in each stratum, and of those how many each counter missed and called doubtful. */
  private readonly yearsIn: Float64Array
  private readonly missed: Float64Array
  private readonly doubted: Float64Array
  /** False boundaries by bin, by group, by counter and quality, and doubtful ones by counter. */
  private readonly falseInBin: Float64Array
  private readonly falseInGroup: Float64Array
  private readonly falseMarks: Float64Array
  private readonly falseDoubted: Float64Array
  /** 1 where a counter looked, [counters x strata]; spacing and quality class of each stratum, [strata]. */
  private readonly looked: Uint8Array
  private readonly spacingOf: Float64Array
  private readonly qualityOf: Uint8Array
  private readonly missChance: Float64Array
  private readonly doubtChance: Float64Array
  private readonly tallies: Float64Array[]
  /** Density of the cell at hand in each class of clarity. */
  private readonly weight = new Float64Array(nodes)
  private readonly steps: { miss: StepSize[]; doubt: StepSize[]; shape: StepSize[] }

  constructor(
    private readonly cells: CounterCells,
    private readonly priors: CounterPriors,
    private readonly random: Random,
  ) {
    const { counters, groups, bins } = cells
    this.k = counters
    this.strata = groups.length * bins * nodes
    this.qualities = 1 + Math.max(...groups.map(({ quality }) => quality))
    this.probability = new Float64Array(cells.cells.length)
    this.tau = priors.doubtFollows.mean
    this.missLogit = new Float64Array(counters).fill(logOddsOf(priors.missed))
    this.doubtLogit = new Float64Array(counters).fill(logOddsOf(priors.doubtfulIfTrue))
    this.gamma = new Float64Array(this.qualities)
    this.falseRate = new Float64Array(counters * this.qualities).fill(
      priors.false[0] / (priors.false[0] + priors.false[1]),
    )
    this.falseDoubt = new Float64Array(counters).fill(0.5)
    this.intensity = new Float64Array(groups.length * bins)
    for (const { group, bin, sites } of cells.cells) this.intensity[group * bins + bin] += sites
    this.placeShare = new Float64Array(bins).fill(1 / bins)
    this.yearsIn = new Float64Array(this.strata)
    this.missed = new Float64Array(counters * this.strata)
    this.doubted = new Float64Array(counters * this.strata)
    this.falseInBin = new Float64Array(bins)
    this.falseInGroup = new Float64Array(groups.length)
    this.falseMarks = new Float64Array(counters * this.qualities)
    this.falseDoubted = new Float64Array(counters)
    const group = (t: number) => groups[Math.floor(t / (bins * nodes))]
    const strata = { length: this.strata }
    this.looked = Uint8Array.from(
      { length: counters * this.strata },
      (_, at) => group(at % this.strata).seenBy[Math.floor(at / this.strata)],
    )
    this.spacingOf = Float64Array.from(strata, (_, t) => cells.spacing[Math.floor(t / nodes) % bins])
    this.qualityOf = Uint8Array.from(strata, (_, t) => group(t).quality)
    this.missChance = new Float64Array(counters * this.strata)
    this.doubtChance = new Float64Array(counters * this.strata)
    this.tallies = [
      this.yearsIn,
      this.missed,
      this.doubted,
      this.falseInBin,
      this.falseInGroup,
      this.falseMarks,
      this.falseDoubted,
    ]
    const sizes = (n: number) => Array.from({ length: n }, () => new StepSize())
    this.steps = { miss: sizes(counters), doubt: sizes(counters), shape: sizes(2 + this.qualities) }
    this.hardness = this.hardnessFor(this.beta, this.sigma, this.gamma)
  }

  /** One sweep over everything unknown. */
  step(): void {
    this.refreshChances()
    this.classifySites()
    this.addUnseenYears()
    this.drawFalseRates()
    this.moveLogits()
    this.moveShape()
  }

  /** Tunes the step sizes; to be called during burn-in only. */
  tune(step: number): void {
    if (step % tuneEvery !== tuneEvery - 1) return
    for (const sizes of Object.values(this.steps)) for (const size of sizes) size.tune()
  }

  years(): number {
    return this.yearsIn.reduce((sum, n) => sum + n, 0)
  }

  /** Share of the years looked at that counter k missed, and their false marks per year looked at. */
  ratesOf(k: number): { missed: number; false: number } {
    let looked = 0
    let missed = 0
    let wrong = 0
    for (let t = 0; t < this.strata; t++) {
      if (!this.sees(k, t)) continue
      looked += this.yearsIn[t]
      missed += this.missed[k * this.strata + t]
    }
    for (let q = 0; q < this.qualities; q++) wrong += this.falseMarks[k * this.qualities + q]
    return { missed: missed / looked, false: wrong / looked }
  }

  /** Odds that a year of a cell's group and bin was missed by all, p0 / (1 - p0). */
  unseenOdds({ group, bin }: Cell): number {
    let unseenShare = 0
    for (let node = 0; node < nodes; node++) {
      const t = (group * this.cells.bins + bin) * nodes + node
      unseenShare += clarityWeights[node] * this.missedByAllChance(t)
    }
    return unseenShare / (1 - unseenShare)
  }

  private sees(k: number, t: number): boolean {
    return this.looked[k * this.strata + t] === 1
  }

  private missedByAllChance(t: number): number {
    let chance = 1
    for (let k = 0; k < this.k; k++) if (this.sees(k, t)) chance *= this.missChance[k * this.strata + t]
    return chance
  }

  private hardnessFor(beta: number, sigma: number, gamma: Float64Array): Float64Array {
    const hardness = new Float64Array(this.strata)
    for (let t = 0; t < hardness.length; t++) {
      hardness[t] = beta * this.spacingOf[t] + gamma[this.qualityOf[t]] + sigma * clarityNodes[t % nodes]
    }
    return hardness
  }

  private refreshChances(): void {
    for (let k = 0; k < this.k; k++) {
      for (let t = 0; t < this.strata; t++) {
        this.missChance[k * this.strata + t] = logistic(this.missLogit[k] + this.hardness[t])
        this.doubtChance[k * this.strata + t] = logistic(this.doubtLogit[k] + this.tau * this.hardness[t])
      }
    }
  }

  /** Draws, cell by cell, how many of its sites are years and of which clarity; the others are false boundaries. */
  private classifySites(): void {
    for (const tally of this.tallies) tally.fill(0)
    const { weight, cells } = this
    for (let c = 0; c < cells.cells.length; c++) {
      const cell = cells.cells[c]
      const first = (cell.group * cells.bins + cell.bin) * nodes
      const intensity = this.intensity[first / nodes]
      let real = 0
      for (let node = 0; node < nodes; node++) {
        weight[node] = clarityWeights[node] * intensity * this.yearDensity(cell, first + node)
        real += weight[node]
      }
      const all = real + this.falseDensity(cell)
      this.probability[c] = real / all
      if (cell.sites <= fewSites) this.classifyOneByOne(cell, first, all)
      else this.classifyTogether(cell, first, real, this.probability[c])
    }
  }

  private classifyOneByOne(cell: Cell, first: number, all: number): void {
    for (let site = 0; site < cell.sites; site++) {
      let left = this.random.uniform() * all
      let node = 0
      while (node < nodes && left >= this.weight[node]) left -= this.weight[node++]
      if (node < nodes) this.tallyYears(cell, first + node, 1)
      else this.tallyFalse(cell, 1)
    }
  }

  private classifyTogether(cell: Cell, first: number, real: number, probability: number): void {
    let left = drawBinomial(this.random, cell.sites, probability)
    let rest = real
    this.tallyFalse(cell, cell.sites - left)
    for (let node = 0; node < nodes && left > 0; node++) {
      const here = node === nodes - 1 ? left : drawBinomial(this.random, left, Math.min(1, this.weight[node] / rest))
      this.tallyYears(cell, first + node, here)
      left -= here
      rest -= this.weight[node]
    }
  }

  private yearDensity({ label }: Cell, t: number): number {
    let density = 1
    for (let k = 0; k < this.k; k++) {
      const miss = this.missChance[k * this.strata + t]
      const doubt = this.doubtChance[k * this.strata + t]
      if (label[k] === absent) density *= miss
      else if (label[k] !== unseen) density *= (1 - miss) * (label[k] === doubtful ? doubt : 1 - doubt)
    }
    return density
  }

  private falseDensity({ label, group, bin }: Cell): number {
    const { places, quality } = this.cells.groups[group]
    let density = places * this.placeShare[bin]
    for (let k = 0; k < this.k; k++) {
      const rate = this.falseRate[k * this.qualities + quality]
      if (label[k] === absent) density *= 1 - rate
      else if (label[k] !== unseen)
        density *= rate * (label[k] === doubtful ? this.falseDoubt[k] : 1 - this.falseDoubt[k])
    }
    return density
  }

  private tallyYears({ label }: Cell, t: number, years: number): void {
    this.yearsIn[t] += years
    for (let k = 0; k < this.k; k++) {
      if (label[k] === absent) this.missed[k * this.strata + t] += years
      else if (label[k] === doubtful) this.doubted[k * this.strata + t] += years
    }
  }

  private tallyFalse({ label, group, bin }: Cell, sites: number): void {
    if (sites === 0) return
    this.falseInBin[bin] += sites
    this.falseInGroup[group] += sites
    for (let k = 0; k < this.k; k++) {
      if (label[k] === absent || label[k] === unseen) continue
      this.falseMarks[k * this.qualities + this.cells.groups[group].quality] += sites
      if (label[k] === doubtful) this.falseDoubted[k] += sites
    }
  }

  /** Years that left no site, and then the expected number of years: p(N) proportional to 1 / N, a half added to each stratum's shape. */
  private addUnseenYears(): void {
    this.missedByAll = 0
    for (let s = 0; s < this.intensity.length; s++) {
      let years = 0
      for (let t = s * nodes; t < (s + 1) * nodes; t++) {
        const unseenYears = drawPoisson(
          this.random,
          this.intensity[s] * clarityWeights[t % nodes] * this.missedByAllChance(t),
        )
        this.missedByAll += unseenYears
        this.yearsIn[t] += unseenYears
        for (let k = 0; k < this.k; k++) if (this.sees(k, t)) this.missed[k * this.strata + t] += unseenYears
        years += this.yearsIn[t]
      }
      this.intensity[s] = drawGamma(this.random, years + 0.5)
    }
  }

  private drawFalseRates(): void {
    const { random, priors } = this
    let total = 0
    for (let bin = 0; bin < this.placeShare.length; bin++) {
      this.placeShare[bin] = drawGamma(random, this.falseInBin[bin] + 1)
      total += this.placeShare[bin]
    }
    for (let bin = 0; bin < this.placeShare.length; bin++) this.placeShare[bin] /= total
    const unmarked = this.unmarkedPlaces()
    for (let k = 0; k < this.k; k++) {
      let marks = 0
      for (let q = 0; q < this.qualities; q++) {
        const wrong = this.falseMarks[k * this.qualities + q]
        let places = 0
        for (const [g, { quality, seenBy }] of this.cells.groups.entries()) {
          if (quality === q && seenBy[k]) places += unmarked[g] + this.falseInGroup[g]
        }
        this.falseRate[k * this.qualities + q] = drawBeta(
          random,
          priors.false[0] + wrong,
          priors.false[1] + places - wrong,
        )
        marks += wrong
      }
      const [doubtA, doubtB] = priors.doubtfulIfFalse
      this.falseDoubt[k] = drawBeta(random, doubtA + this.falseDoubted[k], doubtB + marks - this.falseDoubted[k])
    }
  }

  /** Places that tempted no one, [groups]; there are as many places as years counted, give or take a Poisson number. */
  private unmarkedPlaces(): number[] {
    return this.cells.groups.map(({ places, quality, seenBy }) => {
      let spared = 1
      for (let k = 0; k < this.k; k++) if (seenBy[k]) spared *= 1 - this.falseRate[k * this.qualities + quality]
      return drawPoisson(this.random, places * spared)
    })
  }

  private accept(difference: number, size: StepSize): boolean {
    const accepted = Math.log(1 - this.random.uniform()) < difference
    size.note(accepted)
    return accepted
  }

  private moveLogits(): void {
    const { random, steps } = this
    for (let k = 0; k < this.k; k++) {
      const miss = this.missLogit[k] + steps.miss[k].size * random.normal()
      const missGain = this.missFit(k, miss, this.hardness) - this.missFit(k, this.missLogit[k], this.hardness)
      if (this.accept(missGain, steps.miss[k])) this.missLogit[k] = miss
      const doubt = this.doubtLogit[k] + steps.doubt[k].size * random.normal()
      const doubtGain =
        this.doubtFit(k, doubt, this.tau, this.hardness) - this.doubtFit(k, this.doubtLogit[k], this.tau, this.hardness)
      if (this.accept(doubtGain, steps.doubt[k])) this.doubtLogit[k] = doubt
    }
  }

  /** beta, sigma, tau and the gammas, one after another, each against all counters. */
  private moveShape(): void {
    let fit = this.shapeFit(this.beta, this.sigma, this.tau, this.gamma, this.hardness)
    for (let which = 0; which < 2 + this.qualities; which++) {
      if (which === 0 && this.cells.bins === 1) continue
      const size = this.steps.shape[which]
      const move = size.size * this.random.normal()
      const beta = this.beta + (which === 0 ? move : 0)
      const sigma = this.sigma + (which === 1 ? move : 0)
      const tau = this.tau + (which === 2 ? move : 0)
      const gamma = this.gamma.map((value, q) => value + (which === 2 + q && q > 0 ? move : 0))
      if (!(sigma >= 0)) {
        size.note(false)
        continue
      }
      const hardness = this.hardnessFor(beta, sigma, gamma)
      const proposed = this.shapeFit(beta, sigma, tau, gamma, hardness)
      if (!this.accept(proposed - fit, size)) continue
      fit = proposed
      this.beta = beta
      this.sigma = sigma
      this.tau = tau
      this.gamma.set(gamma)
      this.hardness = hardness
    }
  }

  /** Log posterior of what counter k missed. A Beta prior on the chance at average clarity acts as so many years missed and seen there. */
  private missFit(k: number, logit: number, hardness: Float64Array): number {
    const [a, b] = this.priors.missed
    let fit = a * logit - (a + b) * softPlus(logit)
    for (let t = 0; t < this.strata; t++) {
      if (this.yearsIn[t] === 0 || !this.sees(k, t)) continue
      const x = logit + hardness[t]
      fit += this.missed[k * this.strata + t] * x - this.yearsIn[t] * softPlus(x)
    }
    return fit
  }

  /** Log posterior of what counter k called doubtful, of the years they marked. */
  private doubtFit(k: number, logit: number, tau: number, hardness: Float64Array): number {
    const [a, b] = this.priors.doubtfulIfTrue
    let fit = a * logit - (a + b) * softPlus(logit)
    for (let t = 0; t < this.strata; t++) {
      if (this.yearsIn[t] === 0 || !this.sees(k, t)) continue
      const x = logit + tau * hardness[t]
      const marked = this.yearsIn[t] - this.missed[k * this.strata + t]
      fit += this.doubted[k * this.strata + t] * x - marked * softPlus(x)
    }
    return fit
  }

  private shapeFit(beta: number, sigma: number, tau: number, gamma: Float64Array, hardness: Float64Array): number {
    const { spacingSd, claritySd, qualitySd, doubtFollows } = this.priors
    let fit =
      -0.5 * ((beta / spacingSd) ** 2 + (sigma / claritySd) ** 2 + ((tau - doubtFollows.mean) / doubtFollows.sd) ** 2)
    for (const value of gamma) fit -= 0.5 * (value / qualitySd) ** 2
    for (let k = 0; k < this.k; k++) {
      fit += this.missFit(k, this.missLogit[k], hardness) + this.doubtFit(k, this.doubtLogit[k], tau, hardness)
    }
    return fit
  }
}

function logOddsOf([a, b]: [number, number]): number {
  return Math.log(a / b)
}
