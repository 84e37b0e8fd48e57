// Runs before the first paint, so that a dark room sees no white flash. The rest is in theme.ts.
;(() => {
  let chosen = null
  try {
    chosen = localStorage.getItem('hoarline.theme')
  } catch {
    // No storage on this device: the system's own theme then.
  }
  const dark =
    chosen === 'dark' || (chosen !== 'light' && matchMedia('(prefers-color-scheme: dark)').matches)
  document.documentElement.dataset.theme = dark ? 'dark' : 'light'
})()
