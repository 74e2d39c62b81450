import { useEffect } from 'react'

/**
 * Copied pressures arrive as a program reads them (`2.1e-7`), not as they are set on the page with raised figures.
 * Elements say so by a `data-copy` attribute; a copy without any is left to the browser.
 */
export function usePlainCopy(): void {
  useEffect(() => {
    function onCopy(event: ClipboardEvent) {
      const selection = getSelection()
      if (selection === null || selection.isCollapsed || event.clipboardData === null) return
      const text = plainText(selection.getRangeAt(0))
      if (text === null) return
      event.clipboardData.setData('text/plain', text)
      event.preventDefault()
    }
    document.addEventListener('copy', onCopy)
    return () => document.removeEventListener('copy', onCopy)
  }, [])
}

function plainText(range: Range): string | null {
  const around = range.commonAncestorContainer
  const element = around instanceof Element ? around : around.parentElement
  const own = element?.closest<HTMLElement>('[data-copy]')
  if (own != null) return own.dataset.copy ?? null
  const sheet = document.createElement('div')
  sheet.append(range.cloneContents())
  const marked = sheet.querySelectorAll<HTMLElement>('[data-copy]')
  if (marked.length === 0) return null
  for (const mark of marked) mark.textContent = mark.dataset.copy ?? ''
  // The browser's own account of the text keeps rows and columns apart, but only of what is laid out.
  sheet.style.cssText = 'position: absolute; left: -9999px'
  document.body.append(sheet)
  // biome-ignore lint/performance/useDomNodeTextContent: the text of the DOM alone would run the cells together
  const text = sheet.innerText
  sheet.remove()
  return text
}
