import type { DigestContent, DigestRoom } from '@/lib/wire/digests'

const WIDTH = 76

function wrap(text: string, indent = ''): string {
  const lines: string[] = []
  let line = indent
  for (const word of text.split(' ')) {
    if (line.length + word.length > WIDTH && line.trim() !== '') {
      lines.push(line.trimEnd())
      line = indent
    }
    line += `${word} `
  }
  return [...lines, line.trimEnd()].join('\n')
}

/** "38 people" or "not known yet". */
export const supportsWords = (room: DigestRoom): string =>
  room.supportsPersons === null
    ? 'not known yet'
    : room.supportsPersons === 1
      ? '1 person'
      : `${room.supportsPersons} people`

const roomLines = (room: DigestRoom): string[] => [
  `${room.name} (${room.number}): ${supportsWords(room)}${room.plannedFor === null ? '' : `, planned for ${room.plannedFor}`}; ${room.standing}`,
  ...(room.reason ? [wrap(room.reason, '    ')] : []),
  wrap(room.overWords, '    '),
]

/** The digest as plain text: the same content as the page and the HTML mail. */
export function digestText(content: DigestContent, pageUrl: string): string {
  const done = content.beingDone.flatMap(({ subject, sentence }) => [wrap(`${subject}: ${sentence}`), ''])
  return [
    `${content.building.name}, ${content.weekWords}`,
    '',
    wrap(content.title.toUpperCase()),
    '',
    ...content.lead.flatMap((sentence) => [wrap(sentence), '']),
    ...(done.length === 0 ? [] : ['WHAT WAS FOUND, AND WHO HAS IT', '', ...done]),
    'HOW MANY PEOPLE EACH ROOM’S VENTILATION SUPPORTS',
    '',
    ...content.rooms.flatMap(roomLines),
    '',
    wrap(content.occupancyCaution),
    '',
    ...(content.goodToKnow ? ['GOOD TO KNOW', '', wrap(content.goodToKnow), ''] : []),
    `The week, room by room: ${pageUrl}`,
    '',
    '-- ',
    ...content.cautions.map((sentence) => wrap(sentence)),
    wrap(
      `You get this every Monday because ${content.tenancy.name} named you for it. The building’s operator can change that.`,
    ),
    '',
  ].join('\n')
}
