/** The transactions of the store, for the parts that have calls of their own. */
export interface Within {
  read<T>(work: () => T): T
  write<T>(work: () => T): T
  /** The number of a site. @throws {StoreError} no_such_site */
  site(id: string): number
}
