import * as m0001 from './0001-teams'
import * as m0002 from './0002-users'
import * as m0003 from './0003-sessions'
import * as m0004 from './0004-presets'
import * as m0005 from './0005-jobs'
import * as m0006 from './0006-chunks'
import * as m0007 from './0007-attempts'
import * as m0008 from './0008-ledger'
import * as m0009 from './0009-idempotencyKeys'
import * as m0010 from './0010-events'
import * as m0011 from './0011-leases'
import * as m0012 from './0012-workers'
import * as m0013 from './0013-calibrations'
import * as m0014 from './0014-jobsUnsettled'
import * as m0020 from './0020-usersNotify'
import * as m0021 from './0021-invitations'
import * as m0022 from './0022-resets'
import * as m0023 from './0023-mails'
import * as m0024 from './0024-quotaChanges'
import * as m0025 from './0025-resetWishes'
import * as m0040 from './0040-jobsListed'
import * as m0041 from './0041-jobsByTime'
import * as m0042 from './0042-jobsByCpu'
import * as m0043 from './0043-jobsByState'
import * as m0044 from './0044-jobsByOwner'
import * as m0045 from './0045-jobsByQuestion'
import * as m0046 from './0046-jobsByWords'
import * as m0047 from './0047-etaPredictions'
import * as m0048 from './0048-chunksByState'
import * as m0060 from './0060-presetsVersion'
import * as m0061 from './0061-presetVersions'
import * as m0062 from './0062-presetVersionsFirst'
import * as m0063 from './0063-jobsPreset'
import * as m0078 from './0078-jobsByPreset'
import * as m0080 from './0080-keysByAge'

/** One reversible step of the schema: a single DDL statement each way. Never edited once released. */
export interface Migration { name: string, up: string, down: string }

export const MIGRATIONS: readonly Migration[] = [
  { name: '0001-teams', ...m0001 },
  { name: '0002-users', ...m0002 },
  { name: '0003-sessions', ...m0003 },
  { name: '0004-presets', ...m0004 },
  { name: '0005-jobs', ...m0005 },
  { name: '0006-chunks', ...m0006 },
  { name: '0007-attempts', ...m0007 },
  { name: '0008-ledger', ...m0008 },
  { name: '0009-idempotencyKeys', ...m0009 },
  { name: '0010-events', ...m0010 },
  { name: '0011-leases', ...m0011 },
  { name: '0012-workers', ...m0012 },
  { name: '0013-calibrations', ...m0013 },
  { name: '0014-jobsUnsettled', ...m0014 },
  { name: '0020-usersNotify', ...m0020 },
  { name: '0021-invitations', ...m0021 },
  { name: '0022-resets', ...m0022 },
  { name: '0023-mails', ...m0023 },
  { name: '0024-quotaChanges', ...m0024 },
  { name: '0025-resetWishes', ...m0025 },
  { name: '0040-jobsListed', ...m0040 },
  { name: '0041-jobsByTime', ...m0041 },
  { name: '0042-jobsByCpu', ...m0042 },
  { name: '0043-jobsByState', ...m0043 },
  { name: '0044-jobsByOwner', ...m0044 },
  { name: '0045-jobsByQuestion', ...m0045 },
  { name: '0046-jobsByWords', ...m0046 },
  { name: '0047-etaPredictions', ...m0047 },
  { name: '0048-chunksByState', ...m0048 },
  { name: '0060-presetsVersion', ...m0060 },
  { name: '0061-presetVersions', ...m0061 },
  { name: '0062-presetVersionsFirst', ...m0062 },
  { name: '0063-jobsPreset', ...m0063 },
  { name: '0078-jobsByPreset', ...m0078 },
  { name: '0080-keysByAge', ...m0080 },
]
