// Follows a job: every two seconds asks whether anything is new, and replaces the part of the page that tells it.
// Keeps what is open (details) and where the keyboard is; stops while the page is hidden.
'use strict'
const SECONDS = 2
const part = document.querySelector('[data-live]')
const said = document.querySelector('[data-live-said]')
let cursor = part.dataset.cursor

async function look() {
  try {
    const answer = await fetch(`${part.dataset.live}?after=${encodeURIComponent(cursor)}`, {cache: 'no-store'})
    if (answer.status === 200) {
      cursor = answer.headers.get('X-Cursor') || cursor
      show(await answer.text())
      said.textContent = 'Something new came in.'
    } else if (answer.status === 204) {
      said.textContent = ''
    } else {
      said.textContent = 'The desk could not read this job just now; it asks again.'
    }
  } catch {
    said.textContent = 'The desk does not answer; it asks again.'
  }
}

function show(html) {
  const open = new Set([...part.querySelectorAll('details[open]')].map(one => one.id))
  const focused = part.contains(document.activeElement) ? document.activeElement.id : ''
  part.replaceChildren(...new DOMParser().parseFromString(html, 'text/html').body.childNodes)
  for (const one of part.querySelectorAll('details')) one.open = open.has(one.id)
  if (focused) document.getElementById(focused)?.focus()
}

setInterval(() => { if (!document.hidden) look() }, SECONDS * 1000)
