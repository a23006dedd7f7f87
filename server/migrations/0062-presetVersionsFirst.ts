/** What presets say so far becomes their first version. */
export const up = `
  INSERT IGNORE INTO presetVersions (presetId, version, name, note, content, authorId, createdAt)
  SELECT id, version, name, note, content, ownerId, updatedAt FROM presets`

export const down = 'DELETE FROM presetVersions'
