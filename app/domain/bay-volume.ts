/** Space of a tunnel bay that gas let out of the tube mixes into: a setting of the site, or a stated default. */
import { z } from 'zod'

export const BAY_KEY = 'bay-volume'

export interface BayVolume {
  volumeM3: number
  /** Where the size is taken from, for a sentence. */
  basis: string
  /** The row of the setting; 0 where nobody has set it. */
  settingId: number
}

/** Said as a default wherever it is used. */
const DEFAULT_BAY: BayVolume = {
  volumeM3: 1440,
  basis: 'no size set by the site, taken as 150 m of a tunnel 3.2 m wide and 3.0 m high',
  settingId: 0,
}

const BaySchema = z.object({ volumeM3: z.number().positive() })

/** The size that holds. A setting that no longer reads is a fault of ours and is thrown as one. */
export function bayVolumeOf(setting: { id: number; value: unknown } | null): BayVolume {
  if (setting === null) return DEFAULT_BAY
  return { ...BaySchema.parse(setting.value), basis: 'size set by the site', settingId: setting.id }
}
