import { parseNoteHz } from '#shared/acoustics/notes'
import type { FilmView, InstrumentsPage, InstrumentView } from '#shared/schemas/instrument'
import type { QuoteView, SpecTarget } from '#shared/schemas/order'
import { bareDiameterDrum, type DesignDrum } from '#shared/utils/headDesign'
import { useHeadPrediction, type PredictionInput } from './headPrediction'

const figureOf = (text: string) => {
  const value = Number(text.trim().replace(',', '.'))
  return text.trim() !== '' && Number.isFinite(value) && value > 0 ? value : undefined
}

/** The drum of an instrument, as the server will see it too. */
function drumOf(instrument: InstrumentView): DesignDrum {
  const resonant = instrument.construction === 'double-headed' ? instrument.heads.find(head => head.side === 'resonant') : undefined
  return {
    construction: instrument.construction, diameterMm: instrument.diameterMm, depthMm: instrument.depthMm, bowlVolumeL: instrument.bowlVolumeL,
    ...(resonant && { otherFilm: { ...resonant.film, arealDensityKgM2: resonant.arealDensityKgM2 } }),
  }
}

/** The head as entered, what is wrong with it, what physics predicts of it and what it costs. */
export async function useHeadDesign() {
  const design = useDesign()
  const { loggedIn, user } = useUserSession()
  // Nothing is awaited before the end: hooks and watchers belong to the page only until then.
  const filmsRequest = useFetch<{ items: FilmView[] }>('/api/films', { key: 'design-films' })
  const instrumentsRequest = useFetch<InstrumentsPage>('/api/instruments', { key: 'design-instruments', query: { limit: 200 }, immediate: loggedIn.value && user.value?.role === 'customer' })
  const { data: films, error: filmsError, refresh } = filmsRequest
  const { data: instruments } = instrumentsRequest
  onMounted(design.restore)

  const catalogue = computed(() => films.value?.items ?? [])
  const film = computed(() => catalogue.value.find(one => one.id === design.entry.filmId) ?? catalogue.value[0])
  const instrument = computed(() => instruments.value?.items.find(one => one.id === design.entry.instrumentId))
  const drum = computed<DesignDrum | null>(() => {
    if (instrument.value) return drumOf(instrument.value)
    const { diameterMm } = design.entry
    return diameterMm !== null && diameterMm >= 75 && diameterMm <= 1600 ? bareDiameterDrum(diameterMm) : null
  })
  /** A kettle is tuned by its principal tone. */
  const tone = computed(() => drum.value?.construction === 'kettle' ? 'principal' as const : 'fundamental' as const)
  const target = computed<SpecTarget | null>(() => {
    const { unit, noteName, hz, nPerM } = design.entry
    if (unit === 'tension') {
      const wanted = figureOf(nPerM)
      return wanted && wanted >= 50 && wanted <= 20_000 ? { kind: 'tension', nPerM: wanted } : null
    }
    const wanted = unit === 'note' ? parseNoteHz(noteName) : figureOf(hz)
    return wanted && wanted >= 20 && wanted <= 2000 ? { kind: 'pitch', hz: wanted, of: tone.value } : null
  })
  const errors = computed(() => ({
    diameterMm: drum.value ? undefined : 'Between 75 and 1600 mm (3 and 63 in).',
    target: target.value ? undefined : { note: 'A note with its octave, like D3 or B♭2, from E0 to B6.', hz: 'Between 20 and 2000 Hz.', tension: 'Between 50 and 20 000 N/m.' }[design.entry.unit],
  }))
  const input = computed<PredictionInput | null>(() => drum.value && film.value && target.value ? { drum: drum.value, film: film.value, films: catalogue.value, target: target.value } : null)
  const { prediction, busy, failed } = useHeadPrediction(input)

  const priced = refDebounced(computed(() => ({ filmId: film.value?.id ?? design.entry.filmId, diameterMm: drum.value?.diameterMm, country: design.address.country })), 200)
  const quoteRequest = useAsyncData('design-quote', async () => {
    const { filmId, diameterMm, country } = priced.value
    return filmId && diameterMm ? await $fetch<QuoteView>('/api/head-specs/quote', { query: { filmId, diameterMm, country } }) : null
  }, { watch: [priced] })
  const { data: quote, error: quoteError, status: quoteStatus, refresh: askQuote } = quoteRequest

  await Promise.all([filmsRequest, instrumentsRequest, quoteRequest])
  return {
    design, catalogue, film, filmsError, refresh, instruments, instrument, drum, tone, target, errors, input,
    prediction, predicting: busy, predictionFailed: failed, quote, quoteError, quoting: computed(() => quoteStatus.value === 'pending'), askQuote,
  }
}
