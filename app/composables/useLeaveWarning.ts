/** Asks before the tab closes or reloads while something would be lost; moving on inside the site is no loss. */
export function useLeaveWarningOnUnload(atStake: Ref<boolean>) {
  useEventListener('beforeunload', (event) => {
    if (atStake.value) event.preventDefault()
  })
}

/** Asks before the page is closed or left while something on it would be lost. */
export function useLeaveWarning(atStake: Ref<boolean>, message = 'What you entered here is not saved. Leave the page?') {
  useLeaveWarningOnUnload(atStake)
  onBeforeRouteLeave(() => !atStake.value || window.confirm(message))
}
