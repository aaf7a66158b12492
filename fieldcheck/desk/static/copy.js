// Copies a report's text when its key is pressed.
'use strict'
for (const key of document.querySelectorAll('[data-copy]')) {
  key.addEventListener('click', async () => {
    const text = document.getElementById(key.dataset.copy)
    const said = document.querySelector('[data-copied]')
    try {
      await navigator.clipboard.writeText(text.value)
      said.textContent = 'Copied.'
    } catch {
      text.select()
      said.textContent = 'Marked: copy it with the keyboard.'
    }
  })
}
