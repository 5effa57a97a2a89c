// Preloaded into a server (and its workers) by `--import`: its clock is wrong by LEAKTIDE_TEST_SHIFT_MS.
const shift = Number(process.env.LEAKTIDE_TEST_SHIFT_MS)
const RealDate = Date

globalThis.Date = class extends RealDate {
  /** @param {ConstructorParameters<typeof Date>} given */
  constructor(...given) {
    super(...(given.length === 0 ? [RealDate.now() + shift] : given))
  }

  static now() {
    return RealDate.now() + shift
  }
}
