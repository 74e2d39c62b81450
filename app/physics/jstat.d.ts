// jstat ships no types; only the functions used here are declared.
declare module 'jstat' {
  interface Distribution<Parameters extends number[]> {
    pdf(x: number, ...parameters: Parameters): number
    cdf(x: number, ...parameters: Parameters): number
    inv(probability: number, ...parameters: Parameters): number
  }
  const library: {
    studentt: Distribution<[degreesOfFreedom: number]>
    centralF: Distribution<[numerator: number, denominator: number]>
    normal: Distribution<[mean: number, deviation: number]>
    chisquare: Distribution<[degreesOfFreedom: number]>
  }
  export default library
}
