import { editPreset } from '../../../models/presets'
import { StaleVersion } from '../../../models/refusals'
import { defineRoute } from '../../../utils/defineRoute'
import { findOwnPreset, findPreset, presentPresets, replyPreset } from '../../../utils/presets'
import { HttpProblem } from '../../../utils/problems'
import { useServices } from '../../../utils/services'

export default defineRoute('PATCH /api/presets/:id', async ({ event, auth, id, body, ifMatch }) => {
  const { db } = useServices()
  const preset = await findOwnPreset(db, auth, id)
  if (preset.archivedAt) throw new HttpProblem('conflict', { detail: 'It is archived. Restore it first.' })
  if (body.shared !== undefined && preset.ownerId !== auth.user.id) throw new HttpProblem('forbidden', { detail: 'Only its owner decides who sees it.' })
  try {
    await editPreset(db, id, body, { from: ifMatch, by: auth.user.id })
  }
  catch (error) {
    if (!(error instanceof StaleVersion)) throw error
    const [current] = await presentPresets(db, auth, [await findPreset(db, auth, id)])
    throw new HttpProblem('precondition-failed', { current })
  }
  return replyPreset(db, auth, event, id)
})
