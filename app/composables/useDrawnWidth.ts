/** Width of the element a chart is drawn in; the first guess until the browser has measured it, so that the server draws too. */
export function useDrawnWidth(guess: number) {
  const box = useTemplateRef<HTMLElement>('box')
  const { width } = useElementSize(box, { width: guess, height: 0 })
  return { box, width: computed(() => Math.max(240, Math.round(width.value) || guess)) }
}
