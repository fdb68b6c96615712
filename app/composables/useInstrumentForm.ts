import type { FilmView, InstrumentInput } from '#shared/schemas/instrument'
import { instrumentBody } from '#shared/schemas/instrument'
import { bodyOf, bowlVolumeL, emptyHead, type InstrumentDraft, startDraft, takeFilm, usualDepthMm, usualFilm, usualRods } from '~/utils/instrumentDraft'
import type { ConstructionValue } from '~/utils/words'

type Suggested = 'diameterMm' | 'depthMm' | 'bowlVolumeL' | 'rodCount'

/**
 * The form of an instrument: what construction, size and film suggest fills what was not typed yet; nothing typed is
 * overwritten. Errors stand by field path, as the route writes them.
 */
export function useInstrumentForm(films: Ref<readonly FilmView[]>, start?: InstrumentDraft) {
  // A copy: the form still has to tell what was changed.
  const draft = reactive(start ? { ...start, heads: start.heads.map(head => ({ ...head })) } : startDraft('double-headed', films.value))
  const typed = new Set<Suggested>(start ? ['diameterMm', 'depthMm', 'bowlVolumeL', 'rodCount'] : [])
  const errors = ref<Record<string, string>>({})
  const changed = ref(false)
  watch(draft, () => {
    changed.value = true
  }, { deep: true })

  function suggestFromSize() {
    const { diameterMm, construction } = draft
    if (!diameterMm || Number.isNaN(diameterMm)) return
    if (!typed.has('depthMm')) draft.depthMm = usualDepthMm(construction, diameterMm)
    if (!typed.has('rodCount')) draft.rodCount = usualRods(diameterMm)
    if (!typed.has('bowlVolumeL')) draft.bowlVolumeL = construction === 'kettle' ? bowlVolumeL(diameterMm) : null
  }

  function choose(construction: ConstructionValue) {
    const fresh = startDraft(construction, films.value)
    draft.construction = construction
    if (!typed.has('diameterMm')) draft.diameterMm = fresh.diameterMm
    if (!typed.has('rodCount')) draft.rodCount = fresh.rodCount
    draft.threadPitchMm = fresh.threadPitchMm
    if (typed.has('diameterMm')) suggestFromSize()
    else Object.assign(draft, { depthMm: typed.has('depthMm') ? draft.depthMm : fresh.depthMm, bowlVolumeL: fresh.bowlVolumeL })
    if (construction === 'kettle' || construction === 'fixture') draft.depthMm = 0
    const second = draft.heads.find(head => head.side === 'resonant')
    if (construction === 'double-headed' && !second) {
      const head = emptyHead('resonant')
      const film = usualFilm(films.value, 'resonant')
      if (film) takeFilm(head, film)
      draft.heads.push(head)
    } else if (construction !== 'double-headed' && second) {
      draft.heads.splice(draft.heads.indexOf(second), 1)
    }
  }

  function type(field: Suggested, value: number | null) {
    typed.add(field)
    draft[field] = value
    if (field === 'diameterMm') suggestFromSize()
  }

  /** The body when it holds; otherwise errors beside the fields. */
  function check(): InstrumentInput | undefined {
    const body = bodyOf(draft)
    const result = instrumentBody.safeParse(body)
    errors.value = {}
    for (const issue of result.success ? [] : result.error.issues) errors.value[issue.path.join('.')] ??= issue.message
    return result.success ? body : undefined
  }
  return { draft, errors, changed, choose, type, check }
}
