// What a reader would complain of, found in a page as the browser laid it out. Each function gives a list of complaints.

const describe = node => {
  const element = node.nodeType === Node.TEXT_NODE ? node.parentElement : node
  const step = element.closest('[id]')
  return `${step ? '#' + step.id + ' ' : ''}<${element.tagName.toLowerCase()} ${element.getAttribute('class') ?? ''}> ` +
    JSON.stringify(node.textContent.trim().slice(0, 40))
}

const styles = new Map()
const styleOf = element => styles.get(element) ?? styles.set(element, getComputedStyle(element)).get(element)

const isSeen = element => {
  const style = styleOf(element)
  return style.visibility !== 'hidden' && style.display !== 'none' && !element.closest('.hidden, .skip, script, style, title')
}

// The boxes of every text, one a line, with the formula that it stands in.
let measured = null
const texts = () => {
  if (measured) return measured
  const found = measured = []
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT)
  for (let node = walker.nextNode(); node; node = walker.nextNode()) {
    if (!node.textContent.trim() || !isSeen(node.parentElement)) continue
    const range = document.createRange()
    range.selectNodeContents(node)
    for (const box of range.getClientRects())
      if (box.width > 0.5 && box.height > 0.5) found.push({node, box, formula: node.parentElement.closest('math')})
  }
  return found
}

const scrolls = (element, axis) => {
  for (let e = element; e && e !== document.documentElement; e = e.parentElement)
    if (['auto', 'scroll'].includes(styleOf(e)[`overflow-${axis}`])) return true
  return false
}

// Text that reaches beyond the page, where nothing scrolls it into view; and a page wider than its window.
const beyondThePage = () => {
  const width = document.documentElement.clientWidth
  const out = []
  if (document.documentElement.scrollWidth > width)
    out.push(`the page is ${document.documentElement.scrollWidth} px wide in a window of ${width} px`)
  for (const {node, box} of texts())
    if ((box.left < -0.5 || box.right > width + 0.5) && !scrolls(node.parentElement, 'x'))
      out.push(`${Math.round(box.left)} to ${Math.round(box.right)} px: ${describe(node)}`)
  return out
}

// Text that a box cuts off: sideways where it doesn't scroll, upwards and downwards anywhere.
const cutOff = () => {
  const out = []
  for (const {node, box} of texts()) {
    const ink = {top: box.top + 0.25 * box.height, bottom: box.bottom - 0.25 * box.height}
    for (let e = node.parentElement; e && e !== document.body; e = e.parentElement) {
      const style = styleOf(e)
      if (style.overflowX === 'visible' && style.overflowY === 'visible') continue
      const frame = e.getBoundingClientRect()
      if (style.overflowY === 'hidden' && (ink.top < frame.top - 0.5 || ink.bottom > frame.bottom + 0.5))
        out.push(`cut at the top or bottom: ${describe(node)}`)
      if (style.overflowX === 'hidden' && (box.left < frame.left - 0.5 || box.right > frame.right + 0.5))
        out.push(`cut at the side: ${describe(node)}`)
    }
  }
  return out
}

// Text that lies over other text. Boxes are higher than letters, so that a third of each is left aside; within one
// formula the browser's own layout is trusted.
const overlaps = () => {
  const all = texts().filter(t => !scrolls(t.node.parentElement, 'x') || t.box.right <= innerWidth)
  all.sort((a, b) => a.box.top - b.box.top)
  const out = []
  for (let i = 0; i < all.length; i++) {
    const a = all[i]
    for (let j = i + 1; j < all.length && all[j].box.top < a.box.bottom; j++) {
      const b = all[j]
      if (a.node === b.node || (a.formula && a.formula === b.formula)) continue
      const wide = Math.min(a.box.right, b.box.right) - Math.max(a.box.left, b.box.left)
      const inset = t => 0.3 * t.box.height
      const high = Math.min(a.box.bottom - inset(a), b.box.bottom - inset(b)) - Math.max(a.box.top + inset(a), b.box.top + inset(b))
      if (wide > 1.2 && high > 1) out.push(`${describe(a.node)} over ${describe(b.node)}`)
    }
  }
  return out
}

// Contrast after WCAG 2.2, 1.4.3: 4.5 to 1.
const rgb = text => text.match(/[\d.]+/g).map(Number)
const luminance = colour => {
  const [r, g, b] = colour.slice(0, 3).map(v => (v /= 255) <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4)
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}
const behind = element => {
  for (let e = element; e; e = e.parentElement) {
    const colour = rgb(getComputedStyle(e).backgroundColor)
    if (colour.length < 4 || colour[3] > 0) return colour
  }
  return rgb(getComputedStyle(document.documentElement).colorScheme.includes('dark') && matchMedia('(prefers-color-scheme:dark)').matches ? 'rgb(0,0,0)' : 'rgb(255,255,255)')
}
const lowContrast = () => {
  const out = new Set()
  for (const {node} of texts()) {
    const element = node.parentElement
    const [a, b] = [luminance(rgb(getComputedStyle(element).color)), luminance(behind(element))].sort((x, y) => y - x)
    const ratio = (a + 0.05) / (b + 0.05)
    if (ratio < 4.5) out.add(`${ratio.toFixed(2)}: ${describe(node)}`)
  }
  return [...out]
}

// --- measures ---------------------------------------------------------------------------------------------------

const box = element => element.getBoundingClientRect()
const middle = element => (box(element).top + box(element).bottom) / 2

// The first fraction: how far its parts are apart, its height in lines, and whether its bar covers both.
const fractionShape = () => {
  const fraction = document.querySelector('.flow mfrac, .side mfrac'), [top, bottom] = fraction.children
  const line = box(document.querySelector('.flow mi, .side mi'))
  return {
    apart: box(bottom).top - box(top).bottom, height: box(fraction).height / line.height,
    covers: box(fraction).width >= Math.max(box(top).width, box(bottom).width) - 1,
  }
}

// How far the index or exponent of each `msub` or `msup` stands above its base; less than 0 below it.
const rises = tag =>
  [...document.querySelectorAll(`.flow ${tag}, .side ${tag}`)].map(e => middle(e.children[0]) - middle(e.children[1]))

const signsOfRoots = () => [...document.querySelectorAll('msqrt')].map(e => box(e).width - box(e.firstElementChild).width)

const rightEdgesOfResults = () =>
  [...document.querySelectorAll('.step.result .work .val')].map(e => Math.round(box(e).right))

// Of a paragraph: the left of its first letter and of its last, and its own right edge.
const ends = start => {
  const paragraph = [...document.querySelectorAll('.prose p')].find(p => p.textContent.startsWith(start))
  const at = index => {
    const range = document.createRange()
    range.setStart(paragraph.firstChild, index)
    range.setEnd(paragraph.firstChild, index + 1)
    return range.getBoundingClientRect().left
  }
  return [at(0), at(paragraph.firstChild.length - 2), box(paragraph).right]
}

const focused = () => {
  const element = document.activeElement, b = box(element)
  return {
    href: element.getAttribute('href'), outline: getComputedStyle(element).outlineStyle,
    visible: b.left >= 0 && b.top >= 0 && b.right <= innerWidth && b.bottom <= innerHeight,
  }
}
