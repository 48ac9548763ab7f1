import {
  Body,
  Button,
  Column,
  Container,
  Head,
  Heading,
  Hr,
  Html,
  Img,
  Preview,
  Row,
  Section,
  Text,
} from '@react-email/components'
import type { DigestContent, DigestRoom } from '@/lib/wire/digests'
import { GLASS_SIZE } from './glass'
import { styles } from './styles'
import { supportsWords } from './text'

/** The weekday whose glass stands for a room: its fullest. */
export function fullestDay(room: DigestRoom) {
  return room.days.reduce<DigestRoom['days'][number] | undefined>(
    (best, day) => ((day.level ?? -1) > (best?.level ?? -1) ? day : best),
    undefined,
  )
}

/** The name of a room's glass among the letter's pictures. */
export const glassName = (room: DigestRoom): string => `glass-${room.roomId}`

/** Rooms that fell short stand at the head of the letter, each with its fullest day. */
export const shortRooms = (content: DigestContent): DigestRoom[] =>
  content.rooms.filter((room) => room.standing === 'too little')

function ShortRoom({ room, done }: { room: DigestRoom; done: string | undefined }) {
  const day = fullestDay(room)
  return (
    <Row>
      <Column style={styles.glassCell}>
        {day ? <Img src={`cid:${glassName(room)}`} alt={day.words} {...GLASS_SIZE} /> : null}
      </Column>
      <Column style={{ verticalAlign: 'top', paddingBottom: 14 }}>
        <Text style={styles.name}>{room.name}</Text>
        <Text style={{ ...styles.text, margin: 0 }}>
          Its ventilation supports <b>{supportsWords(room)}</b>
          {room.plannedFor === null ? '' : `; planned for ${room.plannedFor}`}.
        </Text>
        {done ? <Text style={styles.quiet}>{done}</Text> : null}
      </Column>
    </Row>
  )
}

function RoomTable({ rooms }: { rooms: readonly DigestRoom[] }) {
  return (
    <table style={styles.table}>
      <thead>
        <tr>
          <th scope="col" style={styles.columnHead}>
            Room
          </th>
          <th scope="col" style={{ ...styles.columnHead, textAlign: 'right' }}>
            Supports
          </th>
          <th scope="col" style={{ ...styles.columnHead, paddingLeft: 28 }}>
            Outdoor air
          </th>
        </tr>
      </thead>
      <tbody>
        {rooms.map((room) => (
          <tr key={room.roomId}>
            <th scope="row" style={styles.rowHead}>
              {room.name}
              {room.reason ? <div style={styles.reason}>{room.reason}</div> : null}
            </th>
            <td style={styles.figure}>
              {room.supportsPersons === null ? (
                <span style={styles.unit}>not known yet</span>
              ) : (
                <>
                  <b>{room.supportsPersons}</b>{' '}
                  <span style={styles.unit}>{room.supportsPersons === 1 ? 'person' : 'people'}</span>
                </>
              )}
            </td>
            <td
              style={
                room.standing === 'too little' ? { ...styles.standing, ...styles.short } : styles.standing
              }
            >
              {room.standing}
            </td>
          </tr>
        ))}
      </tbody>
    </table>
  )
}

function Found({ content }: { content: DigestContent }) {
  const short = new Set(shortRooms(content).map((room) => room.name))
  const others = content.beingDone.filter(({ subject }) => !short.has(subject))
  if (others.length === 0) return null
  return (
    <>
      <Heading as="h2" style={styles.heading}>
        What was found, and who has it
      </Heading>
      {others.map(({ subject, sentence }) => (
        <Text key={subject + sentence} style={styles.text}>
          <b>{subject}.</b> {sentence}
        </Text>
      ))}
    </>
  )
}

function GoodToKnow({ words }: { words: string | null }) {
  if (!words) return null
  return (
    <>
      <Heading as="h2" style={styles.heading}>
        Good to know
      </Heading>
      <Text style={styles.text}>{words}</Text>
    </>
  )
}

function Foot({ content }: { content: DigestContent }) {
  return (
    <>
      {content.cautions.map((sentence) => (
        <Text key={sentence} style={styles.foot}>
          {sentence}
        </Text>
      ))}
      <Text style={styles.foot}>
        You get this every Monday because {content.tenancy.name} named you for it. The building’s operator can
        change that.
      </Text>
    </>
  )
}

/** The digest as a letter. One picture at most a room that fell short; everything it says is also in words. */
export function DigestLetter({ content, pageUrl }: { content: DigestContent; pageUrl: string }) {
  const short = shortRooms(content)
  const doneFor = (room: DigestRoom) =>
    content.beingDone.find(({ subject }) => subject === room.name)?.sentence
  return (
    <Html lang="en">
      <Head>
        <title>{content.title}</title>
      </Head>
      <Preview>{content.lead[0] ?? content.title}</Preview>
      <Body style={styles.body}>
        <Container style={styles.container}>
          <Row>
            <Column>
              <Text style={styles.brand}>Ebbmark</Text>
            </Column>
            <Column>
              <Text style={styles.week}>
                {content.building.name}, {content.weekWords}
              </Text>
            </Column>
          </Row>
          <Heading as="h1" style={styles.title}>
            {content.title}
          </Heading>
          {content.lead.map((sentence) => (
            <Text key={sentence} style={styles.text}>
              {sentence}
            </Text>
          ))}
          {short.length === 0 ? null : (
            <Section style={styles.needs}>
              {short.map((room) => (
                <ShortRoom key={room.roomId} room={room} done={doneFor(room)} />
              ))}
            </Section>
          )}
          <Found content={content} />
          <Heading as="h2" style={styles.heading}>
            How many people each room’s ventilation supports
          </Heading>
          <RoomTable rooms={content.rooms} />
          <Text style={styles.caution}>{content.occupancyCaution}</Text>
          <GoodToKnow words={content.goodToKnow} />
          <Button href={pageUrl} style={styles.button}>
            See the week, room by room
          </Button>
          <Hr style={styles.line} />
          <Foot content={content} />
        </Container>
      </Body>
    </Html>
  )
}
