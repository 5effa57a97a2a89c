import { z } from 'zod'

const Id = z.string().max(100)
const ref = z.string().max(100).meta({ description: 'reference as the site sheet gives it' })

/** The parts of paths. What they name is looked up, so that an impossible name is simply not found. */
export const SiteParams = z.object({ site: Id.meta({ description: 'id of the site' }) })
export const SiteAndIdParams = SiteParams.extend({ id: Id.meta({ description: 'id the server gave' }) })
export const ChannelParams = SiteParams.extend({ channel: ref })
export const RcdParams = SiteParams.extend({ rcd: ref })
